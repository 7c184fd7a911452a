/** The entry of a worker that does not come up. */
throw new Error('no worker today');
