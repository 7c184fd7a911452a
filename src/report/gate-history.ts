import type { Creep } from '../gate/creep.ts';
import type { AdoptedRun } from '../gate/history.ts';
import { own } from '../gate/pairing.ts';
import type { Step } from '../gate/steps.ts';
import { decimalsFor, rateText, speedText } from './figures.ts';
import { printable, shareText, signedCount } from './gate-words.ts';
import { paragraph } from './paragraph.ts';
import { textTable } from './text-table.ts';

const plain = (text: string): string => text.replaceAll('\u00a0', ' ');
const day = (run: AdoptedRun): string => run.time.slice(0, 10);

/** What `bitassay adopt` says of the best of history. */
export function creepLines(
  { cells, sum, beyond }: Creep,
  history: readonly AdoptedRun[],
  columns: number,
): string[] {
  if (cells.length === 0) return [];
  const most = 5;
  return [
    ...paragraph(
      `Since the best of history (${history.length} adopted ${history.length === 1 ? 'run' : 'runs'}): ${signedCount(sum)} bits over ${cells.length} ${cells.length === 1 ? 'cell' : 'cells'}, ${beyond.length} beyond what is allowed`,
      columns,
    ),
    ...beyond
      .slice(0, most)
      .flatMap(({ id, best, bestRun, now }) =>
        paragraph(
          `${printable(id)}: ${signedCount(now - best)} bits (${shareText(best, now)}) over run ${bestRun + 1} of ${day(history[bestRun])}`,
          columns - 1,
        ).map((line) => ` ${line}`),
      ),
    ...(beyond.length > most ? [`  and ${beyond.length - most} more`] : []),
  ];
}

/** Rows of a cell that say something: the first and last, and those whose bits or data changed. */
interface Row {
  readonly cells: readonly string[];
  readonly shown: boolean;
}

function rowsOf(history: readonly AdoptedRun[], id: string, steps: readonly Step[]): Row[] {
  const known = history.flatMap((run, i) => {
    const cell = own(run.cells, id);
    return cell === undefined ? [] : [{ run, i, cell }];
  });
  return known.map(({ run, i, cell }, at) => {
    const before = known[at - 1];
    const corpus = (one: typeof run) => own(one.corpora, cell.corpus);
    const sameData =
      before !== undefined &&
      corpus(before.run) === corpus(run) &&
      before.cell.symbols === cell.symbols;
    const rate = cell.symbols === 0 ? 0 : cell.bits / cell.symbols;
    const speed = (end: 'encode' | 'decode') => {
      const found = cell[end];
      return found === undefined
        ? '–'
        : speedText({ speed: found[0], low: found[1], high: found[2] });
    };
    const step = steps.find((one) => one.run === i && one.id === id);
    const change =
      before === undefined ? '' : sameData ? bitsChange(before.cell.bits, cell.bits) : 'other data';
    return {
      shown: at === 0 || at === known.length - 1 || !sameData || before.cell.bits !== cell.bits,
      cells: [
        String(i + 1),
        day(run),
        printable(run.tool),
        rateText(rate, Math.max(decimalsFor(rate), 3)),
        change,
        speed('encode'),
        speed('decode'),
        step?.kind ?? '',
      ],
    };
  });
}

function bitsChange(was: number, now: number): string {
  return now === was ? '' : plain(signedCount(now - was));
}

function cellLines(
  history: readonly AdoptedRun[],
  id: string,
  steps: readonly Step[],
  columns: number,
): string[] {
  const rows = rowsOf(history, id, steps);
  const shown = rows.filter((row) => row.shown);
  const alike = rows.length - shown.length;
  return [
    ...paragraph(printable(id), columns),
    ...textTable(
      ['run', 'day', 'version', 'bits/symbol', 'bits', 'encode', 'decode', ''].map((title, c) => ({
        title,
        right: c !== 1 && c !== 2 && c !== 7,
      })),
      shown.map((row) => row.cells),
    ),
    ...(alike === 0
      ? []
      : [` ${alike} ${alike === 1 ? 'run' : 'runs'} without a change of bits left out`]),
    '',
  ];
}

/** The steps of one run: when it was adopted and why, then the cells, those that grew most first. */
function stepLines(
  history: readonly AdoptedRun[],
  run: number,
  steps: readonly Step[],
  columns: number,
): string[] {
  const { reason, tool } = history[run];
  const share = ({ was, now }: Step): number => (was === 0 ? now : (now - was) / was);
  const most = 8;
  const why = reason === undefined ? 'no reason was kept' : `reason: ${printable(reason)}`;
  return [
    ...paragraph(`run ${run + 1} (${day(history[run])}, ${printable(tool)}); ${why}`, columns - 1),
    ...steps
      .toSorted((a, b) => share(b) - share(a))
      .slice(0, most)
      .flatMap(({ id, kind, was, now }) => {
        const over =
          kind === 'step' ? 'over the run before' : 'over its best, by steps that were allowed';
        const text = `${printable(id)} ${signedCount(now - was)} bits (${shareText(was, now)}) ${over}`;
        return paragraph(text, columns - 2).map((line) => ` ${line}`);
      }),
    ...(steps.length > most ? [`  and ${steps.length - most} more (--json lists them all)`] : []),
  ].map((line) => ` ${line}`);
}

/** The cell of each corpus that carries least in the last run which has that corpus. */
export function leadingCells(history: readonly AdoptedRun[]): string[] {
  const leading = new Map<string, { id: string; rate: number }>();
  const last = history.at(-1);
  for (const [id, { corpus, bits, symbols }] of Object.entries(last?.cells ?? {})) {
    const rate = symbols === 0 ? 0 : bits / symbols;
    const best = leading.get(corpus);
    if (best === undefined || rate < best.rate) leading.set(corpus, { id, rate });
  }
  return [...leading.values()].map(({ id }) => id);
}

/** The screen of `bitassay history`. */
export function historyScreen(
  history: readonly AdoptedRun[],
  steps: readonly Step[],
  ids: readonly string[],
  columns: number,
): string {
  const lines = paragraph(
    `${history.length} adopted ${history.length === 1 ? 'run' : 'runs'}, ${day(history[0])} to ${day(history.at(-1)!)}; speeds are multiples of the pacer's, of one class of machine only`,
    columns,
  );
  lines.push('');
  for (const id of ids) lines.push(...cellLines(history, id, steps, columns));
  if (steps.length === 0) {
    lines.push(...paragraph('No cell ever grew by more than was allowed.', columns));
  } else {
    lines.push(' Grown by more than was allowed');
    for (const run of new Set(steps.map((step) => step.run))) {
      const own = steps.filter((step) => step.run === run);
      lines.push(...stepLines(history, run, own, columns));
    }
  }
  return `${lines.join('\n')}\n`;
}
