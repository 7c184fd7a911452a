import type {
  CalibrationRecord,
  ChangeLine,
  CoderLine,
  EstimatorLine,
} from '../harness/calibrate-record.ts';
import { type Column, table, WIDE } from './calibrate-table.ts';
import { countText, signedRateText, wrapText } from './figures.ts';

/** Columns from which on a coder is shown at every length. */
const WIDEST = 130;

const ESTIMATOR_COLUMNS: readonly {
  readonly estimator: string;
  readonly head: string;
  /** False: only on wide screens. */
  readonly narrow?: boolean;
}[] = [
  { estimator: 'plug-in', head: 'plug-in' },
  { estimator: 'Miller–Madow', head: 'corrected' },
  { estimator: 'Grassberger', head: 'Grassberger' },
  { estimator: 'Chao–Shen', head: 'Chao–Shen' },
  { estimator: 'Nemenman–Shafee–Bialek', head: 'NSB', narrow: false },
  { estimator: 'match lengths', head: 'matches' },
  { estimator: 'match lengths, as published', head: 'published', narrow: false },
];

/** How far each estimator is off on average. */
export function estimatorSection(record: CalibrationRecord, columns: number): string[] {
  const { estimators } = record;
  if (estimators.length === 0) return [];
  const shown = ESTIMATOR_COLUMNS.filter(({ narrow }) => columns >= WIDE || narrow !== false);
  const lines = wrapText(
    'How far is each estimator off on average? At the order of the source, 4 where it has none; match lengths fix no order. They are compared, nothing is promised of them.',
    columns - 1,
    ' ',
  );
  const repeated = estimators.filter((line) => line.repetitions > 1);
  const sizes = [...new Set(repeated.map((line) => line.symbol_count))];
  for (const size of new Set([sizes[0], sizes.at(-1)])) {
    if (size === undefined) continue;
    const here = repeated.filter((line) => line.symbol_count === size);
    const text = (source: string, estimator: string): string => {
      const line: EstimatorLine | undefined = here.find(
        (l) => l.source === source && l.estimator === estimator,
      );
      return line === undefined ? '–' : signedRateText(line.bias, 4);
    };
    const names = [...new Set(here.map((line) => line.source))];
    lines.push(
      '',
      ...table(
        [{ head: `${countText(size)} symbols`, left: true }, ...shown],
        names.map((name) => [name, ...shown.map(({ estimator }) => text(name, estimator))]),
      ),
    );
  }
  const matches = estimators.filter((line) => line.held !== undefined);
  const held = matches.reduce((sum, line) => sum + line.held!, 0);
  const runs = matches.reduce((sum, line) => sum + line.repetitions, 0);
  if (runs > 0) {
    lines.push(
      '',
      ...wrapText(
        `The interval of match lengths held the rate in ${held} of ${runs} runs that called it valid: it knows nothing of bias.`,
        columns - 1,
        ' ',
      ),
    );
  }
  return [...lines, ''];
}

/** How far above the rate each coder ends. */
export function coderSection({ coders, sources }: CalibrationRecord, columns: number): string[] {
  if (coders.length === 0) return [];
  const sizes = [...new Set(coders.map((line) => line.symbol_count))];
  const ends = [...new Set([sizes[0], sizes[sizes.length - 1]])];
  const shownSizes = columns >= WIDEST ? sizes : columns >= WIDE ? ends : ends.slice(-1);
  const last = sizes[sizes.length - 1];
  const lines = wrapText(
    'How far above the rate do coders end? One stretch each, decoded and compared, everything counted. A code that can be decoded may lie below the rate where the stretch happens to be an easy one, but never by 30 bits below what the stretch contains. Given are carried bits over the rate; at the longest stretch also ideal bits over the rate, and carried bits over the content of that very stretch.',
    columns - 1,
    ' ',
  );
  const head: Column[] = [
    { head: 'source', left: true },
    { head: 'candidate', left: true },
    ...shownSizes.map((size) => ({ head: `at ${countText(size)}` })),
    { head: 'ideal' },
    { head: 'content' },
    { head: 'verdict', left: true },
  ];
  const over = (line: CoderLine | undefined): string =>
    line?.carried === undefined ? '–' : signedRateText(line.carried - line.rate, 4);
  const rows: string[][] = [];
  for (const { name } of sources) {
    const own = coders.filter((line) => line.source === name);
    [...new Set(own.map((line) => `${line.candidate}@${line.tables}`))].forEach((id, i) => {
      const here = own.filter((line) => `${line.candidate}@${line.tables}` === id);
      const at = (size: number): CoderLine | undefined =>
        here.find((line) => line.symbol_count === size);
      const end = at(last);
      rows.push([
        i === 0 ? name : '',
        here[0].candidate,
        ...shownSizes.map((size) => over(at(size))),
        end?.ideal === undefined ? '–' : signedRateText(end.ideal - end.rate, 4),
        end?.carried === undefined ? '–' : signedRateText(end.carried - end.own_content, 4),
        here.some((line) => line.verdict === 'misses') ? 'misses' : 'holds',
      ]);
    });
  }
  return [...lines, '', ...table(head, rows), ''];
}

/** Whether a change of the source is found. */
export function changeSection({ changes }: CalibrationRecord, columns: number): string[] {
  if (changes.length === 0) return [];
  const rows = changes
    .filter((line) => line.changes || line.verdict === 'misses')
    .map((line) => [line.source, countText(line.symbol_count), foundText(line), line.verdict]);
  const steady = changes.filter((line) => !line.changes);
  const alarms = steady.reduce((sum, line) => sum + line.found, 0);
  const runs = steady.reduce((sum, line) => sum + line.repetitions, 0);
  return [
    ...wrapText(
      'Is a change of the source found? Required is 19 of 20; where nothing changes, no more reports than one in a hundred runs explains. From a change on, no interval is trusted.',
      columns - 1,
      ' ',
    ),
    '',
    ...(rows.length === 0
      ? []
      : [
          ...table(
            [
              { head: 'source', left: true },
              { head: 'symbols' },
              { head: 'found' },
              { head: 'verdict', left: true },
            ],
            rows,
          ),
          '',
        ]),
    ...(runs === 0
      ? []
      : wrapText(
          `Sources that stay the same: ${alarms} false ${alarms === 1 ? 'alarm' : 'alarms'} in ${countText(runs)} runs.`,
          columns - 1,
          ' ',
        )),
    '',
  ];
}

const foundText = ({ found, repetitions }: ChangeLine): string => `${found} of ${repetitions}`;
