import { createHash } from 'node:crypto';
import { readdirSync, statSync } from 'node:fs';
import { readFile, rm, unlink, utimes } from 'node:fs/promises';
import { join } from 'node:path';
import { deserialize, serialize } from 'node:v8';
import { BitassayError } from '../errors/errors.ts';
import { Lanes } from './lanes.ts';
import { writeWhole } from './write-whole.ts';

/** Most bytes that the cache keeps; those used longest ago go first. */
export const MOST_CACHE_BYTES = 2 ** 30;

/** Entries lie below this folder, so that clearing takes nothing else with it, whatever folder was named. */
const ENTRIES = 'entries';
const OPENING = Buffer.from('bitassay cache 1\n');
const HASH_BYTES = 32;
/** What a run that was killed left half written is removed after so long. */
const PART_SECONDS = 3600;

interface FileFacts {
  readonly path: string;
  readonly bytes: number;
  readonly usedAt: number;
}

/**
 * Figures by key, each in a file of its own that is written whole or not at all. An entry that is damaged is no entry, and is
 * removed. Nothing here ever fails a run: what cannot be read is computed, what cannot be written is not kept, and `trouble`
 * says why.
 */
export class CacheStore {
  readonly folder: string;
  readonly #entries: string;
  /** A run asks for thousands of entries at once; a process may hold some hundred files open. */
  readonly #reading = new Lanes(16);
  #trouble: string | undefined;

  constructor(folder: string) {
    this.folder = folder;
    this.#entries = join(folder, ENTRIES);
  }

  /** Why entries could not be written, once that happened. */
  get trouble(): string | undefined {
    return this.#trouble;
  }

  #pathOf(key: string): string {
    return join(this.#entries, key.slice(0, 2), `${key}.figures`);
  }

  /** What was kept under the key, undefined where there is nothing sound. */
  get(key: string): Promise<unknown> {
    return this.#reading.run(() => this.#read(key));
  }

  async #read(key: string): Promise<unknown> {
    const path = this.#pathOf(key);
    let content: Buffer;
    try {
      content = await readFile(path);
    } catch {
      return undefined;
    }
    try {
      const found = unpack(content, key);
      const now = new Date();
      await utimes(path, now, now).catch(() => {});
      return found;
    } catch {
      await unlink(path).catch(() => {});
      return undefined;
    }
  }

  async put(key: string, value: unknown): Promise<void> {
    try {
      await writeWhole(this.#pathOf(key), pack(value, key));
    } catch (error) {
      if (!(error instanceof BitassayError)) throw error;
      this.#trouble ??= error.message;
    }
  }

  /** Entries and their bytes. */
  size(): { entries: number; bytes: number } {
    const files = this.#files().filter(({ path }) => path.endsWith('.figures'));
    return { entries: files.length, bytes: files.reduce((sum, { bytes }) => sum + bytes, 0) };
  }

  /** Removes what was used longest ago, until no more than `mostBytes` are left. */
  async trim(mostBytes = MOST_CACHE_BYTES): Promise<void> {
    const files = this.#files();
    const old = Date.now() - 1000 * PART_SECONDS;
    const parts = files.filter(({ path, usedAt }) => path.endsWith('.part') && usedAt < old);
    for (const { path } of parts) await unlink(path).catch(() => {});
    const entries = files
      .filter(({ path }) => path.endsWith('.figures'))
      .sort((a, b) => a.usedAt - b.usedAt);
    let bytes = entries.reduce((sum, entry) => sum + entry.bytes, 0);
    for (const entry of entries) {
      if (bytes <= mostBytes) return;
      await unlink(entry.path).catch(() => {});
      bytes -= entry.bytes;
    }
  }

  /** @throws what the file system refuses */
  async clear(): Promise<void> {
    await rm(this.#entries, { recursive: true, force: true });
  }

  #files(): FileFacts[] {
    let paths: string[];
    try {
      paths = readdirSync(this.#entries, { recursive: true, encoding: 'utf8' });
    } catch {
      return [];
    }
    return paths.flatMap((name) => {
      const path = join(this.#entries, name);
      const facts = statSync(path, { throwIfNoEntry: false });
      if (facts === undefined || !facts.isFile()) return [];
      return [{ path, bytes: facts.size, usedAt: facts.mtimeMs }];
    });
  }
}

function hashOf(key: string, body: Uint8Array): Buffer {
  return createHash('sha256').update(key).update(body).digest();
}

/** The hash takes the key in: an entry that was moved to another's place is damaged. */
function pack(value: unknown, key: string): Buffer {
  const body = serialize(value);
  return Buffer.concat([OPENING, hashOf(key, body), body]);
}

/** @throws anything for bytes that {@link pack} did not write under this key */
function unpack(content: Buffer, key: string): unknown {
  const start = OPENING.length + HASH_BYTES;
  const body = content.subarray(start);
  const isSound =
    content.length > start &&
    content.subarray(0, OPENING.length).equals(OPENING) &&
    content.subarray(OPENING.length, start).equals(hashOf(key, body));
  if (!isSound) throw new RangeError('not an entry of the cache');
  return deserialize(body);
}
