import { LINE_LETTERS } from '../account/bit-account.ts';
import type { LineGrowth } from '../gate/account-growth.ts';
import { growthText } from '../gate/allow.ts';
import type { CellGate, FileGrowth, Gate } from '../gate/gate.ts';
import type { GateCheck } from '../gate/gate-check.ts';
import { countInText } from './paragraph.ts';
import { spellGap } from './spelled-gap.ts';

/** How a gate is said, the same in a terminal, a pull request and a report of tests. */

/** Text of a record where only printable characters may stand. */
export function printable(text: string): string {
  return text.replace(/[\p{Cc}\p{Cs}\u2028\u2029]/gu, '\ufffd');
}

/** A difference with its sign. */
export function signedCount(value: number): string {
  return `${value < 0 ? '−' : '+'}${countInText(Math.abs(value))}`;
}

/** Bits: whole, or with a decimal where less than ten of a real-valued line. */
function signedBits(value: number): string {
  if (Number.isInteger(value) || Math.abs(value) >= 10) return signedCount(value);
  return `${value < 0 ? '−' : '+'}${Math.abs(value).toFixed(1)}`;
}

/** A growth as a share, with its sign. */
export function shareText(was: number, now: number): string {
  if (was === 0) return 'from none';
  const share = (100 * (now - was)) / was;
  const size = Math.abs(share);
  const decimals = size >= 10 ? 1 : size >= 0.1 ? 2 : 4;
  return `${share < 0 ? '−' : '+'}${size.toFixed(decimals)}\u00a0%`;
}

const LINE_WORDS: Readonly<Record<LineGrowth['line'], string>> = {
  floor: 'floor',
  opening: 'opening',
  structure: 'structure',
  learning: 'learning',
  model: 'model',
  above_floor: 'above the floor',
  rounding: 'rounding',
  tables: 'tables',
  index: 'index',
  framing: 'framing',
  ends: 'ends',
  check: 'check',
};

/** `tables +412 bits: a table takes 59.7 bits, was 56.3`. */
export function lineText({ line, was, now, per }: LineGrowth): string {
  const text = `${LINE_WORDS[line]} ${signedBits(now - was)} bits`;
  if (per === undefined) return text;
  const decimals = Math.abs(per.now - per.was) < 0.1 ? 3 : 1;
  return `${text}: a ${per.unit} takes ${per.now.toFixed(decimals)} bits, was ${per.was.toFixed(decimals)}`;
}

const FIGURES: Readonly<Record<string, string>> = {
  verified: 'decode gives back the input',
  carried_bits: 'carried bits',
  files: 'files',
  flash_bytes: 'flash bytes',
  ram_bytes: 'RAM bytes',
  code_bytes: 'code bytes',
  multiplies: 'multiplies',
  divides: 'divides',
  table_reads: 'table reads',
  branches: 'branches',
  speed: 'speed',
};

/** `decoder.table_reads_worst` in words. */
export function figureWords(figure: string): string {
  const [first, second] = figure.split('.');
  if (second === undefined) return FIGURES[first] ?? first;
  const key = second.replace(/_worst$/, '');
  const worst = key === second ? '' : ' of the worst symbol';
  return `${first} ${FIGURES[key] ?? key}${worst}`;
}

/** The two values of a check: `8 192, was 8 180 (+12)`. */
export function valuesText({ figure, was, now, reason }: GateCheck): string {
  if (typeof was === 'boolean' || typeof now === 'boolean') {
    return now === true
      ? 'yes, was no'
      : `no, was yes${reason === undefined ? '' : ` (${reason})`}`;
  }
  if (was === undefined || now === undefined) return reason ?? '';
  if (figure.endsWith('.speed')) {
    return `×${now.toPrecision(3)}, was ×${was.toPrecision(3)}${reason === undefined ? '' : `; ${reason}`}`;
  }
  const change = now === was ? '' : ` (${signedCount(now - was)}, ${shareText(was, now)})`;
  const note = reason === undefined ? '' : `; ${reason}`;
  return `${countInText(now)}, was ${countInText(was)}${change}${note}`;
}

/** A file by the beginning of its hash: records keep no names. */
export function fileName(file: string): string {
  const [hash, copy] = file.split('#');
  return `${hash.slice(0, 12)}${copy === undefined ? '' : `#${copy}`}`;
}

/** `3f2a… +0.62 % (81 bits)`. */
export function fileText({ file, was, now }: FileGrowth): string {
  return `${fileName(file)} ${shareText(was, now)} (${signedCount(now - was)} bits)`;
}

/** How many files are named. */
export const WORST_FILES = 5;

/** The files of a cell that grew most, and how many more grew; none where no file grew. */
export function worstFilesText({ files }: CellGate): string | undefined {
  const grown = files.filter(({ was, now }) => now > was);
  if (grown.length === 0) return undefined;
  const more = grown.length - WORST_FILES;
  const named = grown.slice(0, WORST_FILES).map(fileText).join(', ');
  const lost = files.filter((file) => file.lost).length;
  const words = grown.length === 1 ? 'file' : 'files';
  return `${words} that grew: ${named}${more > 0 ? ` and ${more} more` : ''}; ${lost} beyond what is allowed`;
}

/** Letters with what they stand for, of the lines that are spelled in these cells. */
export function legend(cells: readonly CellGate[]): string {
  const seen = new Set(cells.flatMap(({ lines }) => lines.map(({ line }) => line)));
  return Object.entries(LINE_LETTERS)
    .filter(([line]) => seen.has(line as LineGrowth['line']))
    .map(([line, letter]) => `${letter} ${LINE_WORDS[line as LineGrowth['line']]}`)
    .join('  ');
}

/** A letter's worth in bits: 1, 2 or 5 times a power of ten, so that most of these growths fit into the width. */
export function growthPiece(cells: readonly CellGate[], width: number): number {
  const extents = cells
    .map(({ lines }) => lines.reduce((sum, { was, now }) => sum + Math.abs(now - was), 0))
    .filter((extent) => extent > 0)
    .sort((a, b) => a - b);
  const shown = Math.min((extents[(extents.length - 1) >> 1] ?? 0) * 3, extents.at(-1) ?? 0);
  for (let power = 1; ; power *= 10) {
    for (const digit of [1, 2, 5]) if (shown / (digit * power) <= width) return digit * power;
  }
}

/** The growth of a cell, spelled: lines that fell stand first, in parentheses. */
export function spelledGrowth({ lines }: CellGate, piece: number, width: number): string {
  const account = Object.fromEntries(lines.map(({ line, was, now }) => [line, now - was]));
  return spellGap(account, 1, piece, width);
}

/** What is allowed, in a sentence's part. */
export function allowText({ allow }: Gate): string {
  return `allowed: ${growthText(allow.total)} in all, ${growthText(allow.each_file)} of each file`;
}

const count = (many: number, one: string, more = `${one}s`): string =>
  `${countInText(many)} ${many === 1 ? one : more}`;

/** The answer in one line. */
export function answerText(gate: Gate): string {
  const lost = gate.cells.filter(({ verdict }) => verdict === 'lost').length;
  const own = gate.cells.filter(({ reference, verdict }) => !reference || verdict === 'lost');
  const better = own.filter(({ verdict }) => verdict === 'better').length;
  const all = count(own.length, 'cell');
  if (lost > 0) return `lost: ${lost} of ${all} ${lost === 1 ? 'does' : 'do'} not hold`;
  if (gate.verdict === 'better')
    return `better: ${better} of ${all}, and nothing is lost: adopt it?`;
  return `held: ${all}, none worse than the baseline by more than is allowed`;
}

/** What was not compared, each reason once with how many it holds for. */
export function notComparedTexts({ cells }: Gate): string[] {
  const tally = new Map<string, number>();
  for (const { checks, reference } of cells) {
    if (reference) continue;
    for (const { figure, verdict, reason } of checks) {
      if (verdict !== 'not compared') continue;
      const kind = figure.endsWith('.speed') ? 'speeds' : figureWords(figure);
      const key = `${kind}: ${reason ?? ''}`;
      tally.set(key, (tally.get(key) ?? 0) + 1);
    }
  }
  return [...tally].map(
    ([text, times]) => `${printable(text)}${times === 1 ? '' : ` (${times} ×)`}`,
  );
}

/** Speeds that were compared, counted by verdict; undefined where none was. */
export function speedsText({ cells }: Gate): string | undefined {
  const speeds = cells.flatMap(({ checks }) => checks.filter((c) => c.figure.endsWith('.speed')));
  const of = (verdict: GateCheck['verdict']) => speeds.filter((c) => c.verdict === verdict).length;
  const parts = [
    [of('held'), 'alike'],
    [of('better'), 'faster'],
    [of('lost'), 'slower'],
    [of('open'), 'undecided'],
  ] as const;
  const said = parts.filter(([many]) => many > 0).map(([many, word]) => `${many} ${word}`);
  return said.length === 0 ? undefined : `Speeds: ${said.join(', ')}`;
}

/** Cells by how urgent they are: failed ones first, then by share of growth. */
export function mostUrgentFirst(cells: readonly CellGate[]): CellGate[] {
  const urgency = ({ was, now }: CellGate): number => {
    if (was === undefined || now === undefined) return Number.POSITIVE_INFINITY;
    return was === 0 ? now : (now - was) / was;
  };
  return cells.toSorted((a, b) => {
    const [first, second] = [urgency(a), urgency(b)];
    return first === second ? 0 : second - first;
  });
}

/** Cells that were slower on an uneven machine, by their checks. */
export function unevenTexts({ cells }: Gate): string[] {
  return cells.flatMap(({ id, checks }) =>
    checks
      .filter(({ verdict, reason }) => verdict === 'open' && reason?.endsWith('time it again'))
      .map((check) => `${printable(id)}: ${figureWords(check.figure)} ${valuesText(check)}`),
  );
}

/** What moved under the account, where its floor did; undefined where it did not. */
export function floorText({ floorMoved }: CellGate): string | undefined {
  if (Math.abs(floorMoved) < 0.0015) return undefined;
  return `the floor, an estimate, moved by ${signedBits(floorMoved)} bits, and lines above it against it`;
}

/** Files that only one side has, each once. */
export function unpairedFilesOf({ cells }: Gate): { file: string; found: 'baseline' | 'run' }[] {
  const seen = new Map<string, { file: string; found: 'baseline' | 'run' }>();
  for (const { unpairedFiles } of cells)
    for (const one of unpairedFiles) seen.set(`${one.file} ${one.found}`, one);
  return [...seen.values()];
}
