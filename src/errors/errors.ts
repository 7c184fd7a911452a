/**
 * The kinds of failure this program tells apart. Each carries where it happened, what was expected and what was met,
 * so that the person reading the message can act on it. The command line turns the kind into an exit code.
 */

/** Where a failure was met; every part is optional, and only the known parts are filled in. */
export interface Where {
  readonly file?: string;
  readonly line?: number;
  readonly key?: string;
  readonly byteOffset?: number;
  readonly bitOffset?: number;
  readonly messageIndex?: number;
  readonly symbolIndex?: number;
  readonly coder?: string;
  readonly expected?: string;
  readonly got?: string;
  /** What the reader can do about it, as a whole sentence. */
  readonly advice?: string;
}

/** Common base: a message of one paragraph, and {@link Where}. */
export abstract class BitassayError extends Error {
  readonly where: Where;

  constructor(message: string, where: Where = {}, cause?: unknown) {
    super(message, cause === undefined ? undefined : { cause });
    this.where = where;
    this.name = new.target.name;
  }
}

/** The caller's mistake: a wrong option, plan, file or argument. Nothing was coded. */
export class InputError extends BitassayError {}

/** Something asked for that a later version will do; refused rather than ignored. */
export class NotYetError extends InputError {}

/** A model or a coder broke a promise of its contract (a zero frequency, a total too large …). */
export class PromiseError extends BitassayError {}

/** Coded bytes are wrong: cut, altered or not from this coder. */
export class CorruptStreamError extends BitassayError {}

/** Stopped on purpose at a stated limit (symbols, steps, memory); the result is unknown. */
export class LimitError extends BitassayError {}

/** The machine is in the way: disk full, file system read-only, out of memory. */
export class EnvironmentError extends BitassayError {}

/** Our own bug: an invariant of this program does not hold. */
export class BugError extends BitassayError {}

/** One line for each known part of `where`, for screens and logs. */
export function describeWhere(where: Where): string[] {
  const lines: string[] = [];
  const place: string[] = [];
  if (where.file !== undefined)
    place.push(where.line === undefined ? where.file : `${where.file}, line ${where.line}`);
  else if (where.line !== undefined) place.push(`line ${where.line}`);
  if (where.key !== undefined) place.push(`key ${where.key}`);
  if (where.byteOffset !== undefined) place.push(`byte ${where.byteOffset}`);
  if (where.bitOffset !== undefined) place.push(`bit ${where.bitOffset}`);
  if (where.messageIndex !== undefined) place.push(`message ${where.messageIndex}`);
  if (where.symbolIndex !== undefined) place.push(`symbol ${where.symbolIndex}`);
  if (where.coder !== undefined) place.push(`coder ${where.coder}`);
  if (place.length > 0) lines.push(`where: ${place.join(', ')}`);
  if (where.expected !== undefined) lines.push(`expected: ${where.expected}`);
  if (where.got !== undefined) lines.push(`got: ${where.got}`);
  if (where.advice !== undefined) lines.push(where.advice);
  return lines;
}
