import { type Stats, statSync } from 'node:fs';
import { readFile, realpath, writeFile } from 'node:fs/promises';
import pc from 'picocolors';
import { InputError } from '../errors/errors.ts';
import { explainFileError } from '../errors/fs-faults.ts';
import { writeWhole } from '../harness/write-whole.ts';

/** The name that stands for standard input or output on a command line. */
export const STANDARD_STREAM = '-';

/** Columns that a screen may fill: those of the terminal, or 100 where output goes elsewhere. */
export function terminalColumns(): number {
  return process.stdout.columns ?? 100;
}

/** Whether standard output may show characters beyond ASCII: a file takes them all, a terminal those of its locale. */
export function terminalShowsUnicode(): boolean {
  if (process.stdout.isTTY !== true) return true;
  const { LC_ALL, LC_CTYPE, LANG, TERM } = process.env;
  if (TERM === 'linux' || TERM === 'dumb') return false;
  if (process.platform === 'win32') return true;
  return /utf-?8/i.test(LC_ALL || LC_CTYPE || LANG || '');
}

/** Colour functions for standard output; they change nothing where it is no terminal or NO_COLOR is set. */
export function terminalColours(): ReturnType<typeof pc.createColors> {
  const wanted = process.stdout.isTTY === true && (process.env['NO_COLOR'] ?? '') === '';
  return pc.createColors(wanted);
}

/** Writes to standard output and waits until it is taken. Throws what the system says (EPIPE, ENOSPC …). */
export function writeStandardOutput(content: Uint8Array | string): Promise<void> {
  return new Promise((resolve, reject) => {
    process.stdout.write(content, (error) => (error == null ? resolve() : reject(error)));
  });
}

async function readStandardInput(): Promise<Uint8Array> {
  const chunks: Buffer[] = [];
  for await (const chunk of process.stdin) chunks.push(Buffer.from(chunk));
  return Buffer.concat(chunks);
}

/**
 * The whole content of a file, or of standard input for `-`.
 * @throws the errors of {@link explainFileError}
 */
export async function readFileWhole(path: string): Promise<Uint8Array> {
  if (path === STANDARD_STREAM) return readStandardInput();
  try {
    return await readFile(path);
  } catch (error) {
    throw explainFileError(error, path);
  }
}

function statusOf(path: string): Stats | undefined {
  try {
    return statSync(path, { throwIfNoEntry: false });
  } catch (error) {
    throw explainFileError(error, path);
  }
}

/**
 * Refuses a place that {@link writeFileWhole} would refuse, before any work is done for it.
 * @throws InputError for a folder, or a file that exists where `overwrite` is false
 */
export function checkWritable(path: string, overwrite: boolean): void {
  if (path === STANDARD_STREAM) return;
  const status = statusOf(path);
  if (status?.isDirectory()) {
    throw new InputError(`${path}: this is a folder, not a file`, {
      file: path,
      advice: 'Name a file inside it.',
    });
  }
  if (status?.isFile() && !overwrite) {
    throw new InputError(`${path}: this file exists already`, {
      file: path,
      advice: 'Choose another name, or say --force to replace it.',
    });
  }
}

/**
 * Writes a file whole or not at all. `-` is standard output; devices and pipes are written to as they are, never replaced; a
 * link stays, and the file that it leads to is replaced.
 * @throws the errors of {@link checkWritable} and {@link explainFileError}
 */
export async function writeFileWhole(
  path: string,
  content: Uint8Array | string,
  overwrite = false,
): Promise<void> {
  checkWritable(path, overwrite);
  if (path === STANDARD_STREAM) return writeStandardOutput(content);
  try {
    const status = statusOf(path);
    if (status === undefined) await writeWhole(path, content);
    else if (status.isFile()) await writeWhole(await realpath(path), content);
    else await writeFile(path, content);
  } catch (error) {
    throw explainFileError(error, path);
  }
}
