import { readdir, readFile, stat } from 'node:fs/promises';
import { basename, dirname } from 'node:path';
import { type BitassayError, EnvironmentError, InputError } from '../errors/errors.ts';
import { nearestWord } from '../errors/nearest.ts';

/** What the system answers when the path that the caller gave is at fault, in our words. */
const CALLERS_FAULTS: Record<string, string> = {
  ENOENT: 'does not exist',
  ENOTDIR: 'does not exist: a part of its path is no folder',
  EACCES: 'may not be read: its permissions forbid it',
  EPERM: 'may not be read: its permissions forbid it',
  EISDIR: 'is a folder, where a file is wanted',
  ELOOP: 'cannot be reached: its links run in a circle',
  ENAMETOOLONG: 'has a name longer than the file system allows',
};

/**
 * The error behind a system's refusal to read `file`: the caller's mistake where the path is at fault, else the
 * environment's. Anything that is no system error comes back unchanged.
 */
export function readFault(error: unknown, file: string): unknown {
  const code = error instanceof Error ? Reflect.get(error, 'code') : undefined;
  if (typeof code !== 'string') return error;
  if (Object.hasOwn(CALLERS_FAULTS, code))
    return new InputError(`${file} ${CALLERS_FAULTS[code]}`, { file, got: code }, error);
  return new EnvironmentError(`${file} could not be read`, { file, got: code }, error);
}

/** For a missing file: the name in the same folder that is nearest to it. */
async function neighbourOf(path: string): Promise<string | undefined> {
  try {
    return nearestWord(basename(path), await readdir(dirname(path)));
  } catch {
    return undefined;
  }
}

async function explain(error: unknown, path: string, shown: string): Promise<unknown> {
  const fault = readFault(error, shown);
  if (!(fault instanceof InputError) || fault.where.got !== 'ENOENT') return fault;
  const near = await neighbourOf(path);
  if (near === undefined) return fault;
  return new InputError(
    fault.message,
    { ...fault.where, advice: `In the same folder there is ${near}.` },
    error,
  );
}

/**
 * Size of an ordinary file, in bytes.
 * @param shown  how messages name the file
 * @throws InputError when it is missing, unreadable, a folder, no ordinary file, or empty
 */
export async function inputFileBytes(path: string, shown: string): Promise<number> {
  let found: Awaited<ReturnType<typeof stat>>;
  try {
    found = await stat(path);
  } catch (error) {
    throw await explain(error, path, shown);
  }
  if (found.isDirectory()) {
    throw new InputError(`${shown} ${CALLERS_FAULTS['EISDIR']}`, {
      file: shown,
      advice: `To take the files in it, write ${shown.replace(/\/?$/, '/*')}.`,
    });
  }
  if (!found.isFile()) {
    throw new InputError(`${shown} is no ordinary file`, {
      file: shown,
      advice: 'Write what it gives into a file first: it is read more than once.',
    });
  }
  if (found.size === 0) throw emptyFile(shown);
  return found.size;
}

function emptyFile(shown: string): BitassayError {
  return new InputError(`${shown} is empty`, {
    file: shown,
    expected: 'at least one byte',
    got: '0 bytes',
  });
}

/**
 * The bytes of a file.
 * @throws as {@link inputFileBytes}, or EnvironmentError when the system fails
 */
export async function readInputFile(path: string, shown: string): Promise<Uint8Array> {
  let buffer: Buffer;
  try {
    buffer = await readFile(path);
  } catch (error) {
    throw await explain(error, path, shown);
  }
  if (buffer.length === 0) throw emptyFile(shown);
  return new Uint8Array(buffer.buffer, buffer.byteOffset, buffer.length);
}
