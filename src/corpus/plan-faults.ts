import { InputError, NotYetError } from '../errors/errors.ts';

/** One thing that is wrong with a plan. */
export interface Fault {
  readonly line: number;
  /** The path of the key, with dots and list indexes in brackets. */
  readonly key?: string;
  readonly problem: string;
  readonly expected?: string;
  readonly got?: string;
  readonly advice?: string;
  /** What is asked for will exist in a later version. */
  readonly notYet?: boolean;
}

/** `corpora.telemetry.files[1]` */
export function keyText(path: readonly PropertyKey[]): string {
  let text = '';
  for (const key of path) {
    if (typeof key === 'number') text += `[${key}]`;
    else text += text === '' ? String(key) : `.${String(key)}`;
  }
  return text;
}

/** A value as it was met, short enough for a line. */
export function gotText(value: unknown): string {
  if (value === undefined) return 'nothing';
  const text = JSON.stringify(value) ?? String(value);
  return text.length <= 60 ? text : `${text.slice(0, 57)}…`;
}

function faultLine(fault: Fault): string {
  const key = fault.key === undefined ? '' : `${fault.key}: `;
  const parts = [`line ${fault.line}, ${key}${fault.problem}`];
  if (fault.expected !== undefined) parts.push(`expected ${fault.expected}`);
  if (fault.got !== undefined) parts.push(`got ${fault.got}`);
  const sentence = parts.join('; ');
  return fault.advice === undefined ? sentence : `${sentence}. ${fault.advice}`;
}

/**
 * One error for all faults, in the order of their lines, a line each. {@link NotYetError} when nothing else is wrong than
 * that features are asked for which are not built yet.
 * @param faults  at least one
 */
export function planError(file: string, faults: readonly Fault[]): InputError {
  const sorted = [...faults].sort((a, b) => a.line - b.line);
  const only = sorted.length === 1;
  const opening = only ? `${file} has a fault:` : `${file} has ${sorted.length} faults:`;
  const message = [opening, ...sorted.map((fault) => `  ${faultLine(fault)}`)].join('\n');
  const [first] = sorted;
  const where = {
    file,
    ...(only ? { line: first.line } : {}),
    ...(only && first.key !== undefined ? { key: first.key } : {}),
  };
  return sorted.every((fault) => fault.notYet === true)
    ? new NotYetError(message, where)
    : new InputError(message, where);
}
