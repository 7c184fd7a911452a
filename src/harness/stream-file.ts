import { closeSync, mkdtempSync, openSync, readSync, rmSync, writeSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { CodedSource } from '../coders/in-pieces.ts';
import { explainFileError } from '../errors/fs-faults.ts';

/** Folders of coded bytes that are still there; removed when the process ends, whatever ends it but a kill. */
const openFolders = new Set<string>();

function removeFolders(): void {
  for (const folder of openFolders) rmSync(folder, { recursive: true, force: true });
  openFolders.clear();
}

/** Coded bytes in a file of their own outside the run, while a cell is coded and decoded. {@link close} removes it. */
export class CodedFile {
  readonly #folder: string;
  readonly #path: string;
  readonly #descriptor: number;
  #byteLength = 0;

  /** @throws EnvironmentError or InputError that says what the file system refused */
  constructor(parent = tmpdir()) {
    try {
      this.#folder = mkdtempSync(join(parent, 'bitassay-'));
      if (openFolders.size === 0) process.once('exit', removeFolders);
      openFolders.add(this.#folder);
      this.#path = join(this.#folder, 'coded');
      this.#descriptor = openSync(this.#path, 'w+', 0o600);
    } catch (error) {
      throw explainFileError(error, parent);
    }
  }

  /** Appends bytes; for an encoder's sink. */
  write(bytes: Uint8Array): void {
    try {
      for (let at = 0; at < bytes.length; )
        at += writeSync(this.#descriptor, bytes, at, bytes.length - at, this.#byteLength + at);
    } catch (error) {
      throw explainFileError(error, this.#path);
    }
    this.#byteLength += bytes.length;
  }

  /** What was written so far, to be read in pieces. */
  source(): CodedSource {
    return {
      byteLength: this.#byteLength,
      read: (into, at) => {
        try {
          return readSync(this.#descriptor, into, 0, into.length, at);
        } catch (error) {
          throw explainFileError(error, this.#path);
        }
      },
    };
  }

  /** Removes the file; to be called once. */
  close(): void {
    closeSync(this.#descriptor);
    rmSync(this.#folder, { recursive: true, force: true });
    openFolders.delete(this.#folder);
    if (openFolders.size === 0) process.off('exit', removeFolders);
  }
}
