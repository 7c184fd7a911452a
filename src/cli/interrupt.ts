import { exitCodes } from './exit.ts';

/**
 * Listens for Ctrl-C while `work` runs: the first one asks the run to begin nothing new and keep what it has, the second
 * one ends the program at once.
 */
export async function whileInterruptible<T>(
  work: (interrupted: () => boolean) => Promise<T>,
): Promise<T> {
  let interrupts = 0;
  const listen = (): void => {
    interrupts++;
    if (interrupts > 1) process.exit(exitCodes.interrupted);
    process.stderr.write('bitassay: finishing what is in hand; Ctrl-C again ends at once\n');
  };
  process.on('SIGINT', listen);
  try {
    return await work(() => interrupts > 0);
  } finally {
    process.off('SIGINT', listen);
  }
}
