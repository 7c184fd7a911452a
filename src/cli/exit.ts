import { CommanderError } from 'commander';
import {
  BitassayError,
  BugError,
  describeWhere,
  EnvironmentError,
  PromiseError,
} from '../errors/errors.ts';

/** What the program's exit code says; scripts and build servers rely on these numbers. */
export const exitCodes = {
  done: 0,
  /** The answer is no: a gate lost, no cell meets the limits, an examination failed. */
  answerIsNo: 1,
  badInput: 2,
  cellFailed: 3,
  environment: 4,
  ownBug: 70,
  interrupted: 130,
} as const;

export type ExitCode = (typeof exitCodes)[keyof typeof exitCodes];

/** Thrown by a command that has said all there is to say and ends with another code than 0. */
export class CommandEnd extends Error {
  readonly code: ExitCode;

  constructor(code: ExitCode) {
    super(`the command ends with exit code ${code}`);
    this.code = code;
  }
}

/** Failures of the system that are nobody's mistake, where no file name is at hand to explain them with. */
const MACHINE_CODES: Readonly<Record<string, string>> = {
  ENOSPC: 'the disk is full',
  EDQUOT: 'your quota of the disk is used up',
  EROFS: 'the file system can only be read',
  ENOMEM: 'there is no memory left',
  EMFILE: 'too many files are open',
  ENFILE: 'too many files are open on this machine',
  EIO: 'a device failed',
  ERR_MEMORY_ALLOCATION_FAILED: 'there is no memory left',
  ERR_WORKER_OUT_OF_MEMORY: 'there is no memory left',
};

/** An engine's words for "no memory" in errors that carry no code. */
const NO_MEMORY = /allocation failed|out of memory/i;

/** How a failure ends the program, and the paragraph for the reader; no text where all has been said. */
export interface Ending {
  readonly code: ExitCode;
  readonly text?: string;
}

function paragraph(error: Error, opening = error.message): string {
  const where = error instanceof BitassayError ? error.where : {};
  // A place that is nothing but the file which the sentence names already says nothing new.
  const known = opening.includes(where.file ?? '\0') ? `where: ${where.file}` : undefined;
  const lines = describeWhere(where).filter((line) => line !== known);
  return [`bitassay: ${opening}`, ...lines.map((line) => `  ${line}`)].join('\n');
}

/** Turns what a command threw into an exit code and a paragraph without a stack. */
export function endingOf(thrown: unknown): Ending {
  if (thrown instanceof CommandEnd) return { code: thrown.code };
  // Commander has written its own message or the help that was asked for.
  if (thrown instanceof CommanderError) {
    return { code: thrown.exitCode === 0 ? exitCodes.done : exitCodes.badInput };
  }
  const error = thrown instanceof Error ? thrown : new Error(String(thrown));
  const code: unknown = Reflect.get(error, 'code');
  if (code === 'EPIPE') return { code: exitCodes.done };
  if (error.name === 'AbortError') {
    return { code: exitCodes.interrupted, text: 'bitassay: interrupted' };
  }
  if (error instanceof BugError || error instanceof PromiseError) return ownBug(error);
  if (error instanceof EnvironmentError) {
    return { code: exitCodes.environment, text: paragraph(error) };
  }
  if (error instanceof BitassayError) return { code: exitCodes.badInput, text: paragraph(error) };
  const machine =
    MACHINE_CODES[String(code)] ??
    (NO_MEMORY.test(error.message) ? MACHINE_CODES['ENOMEM'] : undefined);
  if (machine !== undefined) {
    return { code: exitCodes.environment, text: paragraph(error, `${machine} (${error.message})`) };
  }
  return ownBug(error);
}

function ownBug(error: Error): Ending {
  const debug = process.env['BITASSAY_DEBUG'] === '1';
  const lines = [
    paragraph(error, `this is a fault of bitassay itself: ${error.message}`),
    '  Please report it with the command you typed and this text; no data need go with it.',
    debug ? `${error.stack}` : '  BITASSAY_DEBUG=1 shows where in the program it happened.',
  ];
  return { code: exitCodes.ownBug, text: lines.join('\n') };
}

/**
 * Runs a command to its end and says what went wrong, if anything, on standard error.
 * @param action  usually the parsing of the command line, with the commander program under `exitOverride`
 * @param say     takes the paragraph; standard error unless a test listens
 * @returns the exit code
 */
export async function runCommand(
  action: () => unknown,
  say: (text: string) => void = (text) => process.stderr.write(`${text}\n`),
): Promise<ExitCode> {
  try {
    await action();
    return exitCodes.done;
  } catch (error) {
    const { code, text } = endingOf(error);
    if (text !== undefined) say(text);
    return code;
  }
}

/**
 * To be called once, before any output. Ends the program when standard output fails: quietly with 0 when its reader has
 * seen enough (`… | head`), with 4 when the disk behind it is full. An error that escapes every command ends it as a bug of
 * ours, not with Node's own code 1, which would say "the answer is no".
 */
export function watchProcess(): void {
  const end = (error: unknown) => {
    const { code, text } = endingOf(error);
    if (text !== undefined) process.stderr.write(`${text}\n`);
    process.exit(code);
  };
  process.stdout.on('error', end);
  process.on('uncaughtException', end);
}
