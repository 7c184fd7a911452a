import { randomBytes } from 'node:crypto';
import { mkdir, rename, rm, writeFile } from 'node:fs/promises';
import { dirname, join } from 'node:path';
import { explainFileError } from '../errors/fs-faults.ts';

/**
 * Writes a file whole or not at all: into a new file of the same folder, which then takes the name. Missing folders are made.
 * @throws EnvironmentError or InputError that says what the file system refused
 */
export async function writeWhole(path: string, content: Uint8Array | string): Promise<void> {
  const folder = dirname(path);
  const beside = join(folder, `.${randomBytes(6).toString('hex')}.part`);
  try {
    await mkdir(folder, { recursive: true });
    await writeFile(beside, content);
    await rename(beside, path);
  } catch (error) {
    // Where the folder is none, nothing lies there to be removed.
    await rm(beside, { force: true }).catch(() => {});
    throw explainFileError(error, path);
  }
}
