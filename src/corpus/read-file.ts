import { readdir, readFile, stat } from 'node:fs/promises';
import { basename, dirname } from 'node:path';
import { type BitassayError, InputError } from '../errors/errors.ts';
import { explainFileError } from '../errors/fs-faults.ts';
import { nearestWord } from '../errors/nearest.ts';

/** For a missing file: the name in the same folder that is nearest to it. */
async function neighbourOf(path: string): Promise<string | undefined> {
  try {
    return nearestWord(basename(path), await readdir(dirname(path)));
  } catch {
    return undefined;
  }
}

/** The system's refusal in words; for a missing file with the name in the same folder that is nearest. */
async function explain(error: unknown, path: string, shown: string): Promise<BitassayError> {
  const fault = explainFileError(error, shown);
  if ((error as NodeJS.ErrnoException).code !== 'ENOENT') return fault;
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
    throw new InputError(`${shown}: this is a folder, not a file`, {
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
