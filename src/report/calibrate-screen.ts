import type {
  CalibrationRecord,
  ChangeLine,
  CoderLine,
  EstimatorLine,
  IntervalLine,
} from '../harness/calibrate-record.ts';
import { countText, padLeft, padRight, signedRateText, wrapText } from './figures.ts';

export interface CalibrateScreenOptions {
  readonly columns: number;
}

/** Columns from which on the wide tables fit. */
const WIDE = 100;
/** Columns from which on a coder is shown at every length. */
const WIDEST = 130;
const DECIMALS = 5;

interface Column {
  readonly head: string;
  readonly left?: boolean;
}

function table(columns: readonly Column[], rows: readonly (readonly string[])[]): string[] {
  const widths = columns.map(({ head }, c) =>
    Math.max([...head].length, ...rows.map((row) => [...row[c]].length)),
  );
  const write = (cells: readonly string[]): string =>
    ` ${cells
      .map((text, c) =>
        columns[c].left === true ? padRight(text, widths[c]) : padLeft(text, widths[c]),
      )
      .join('  ')}`.trimEnd();
  return [write(columns.map((c) => c.head)), ...rows.map(write)];
}

/** What the sources are: the rate is calculated, or bounded where it has no closed form. */
function sourceSection({ sources }: CalibrationRecord, columns: number): string[] {
  const rows = sources.map(({ name, order, rate, description, alphabet_size }) => {
    const text = rate === undefined ? 'changes' : rateText(rate.low, rate.high);
    const about = `${description}, alphabet of ${countText(alphabet_size)}`;
    return { left: [name, text, order === undefined ? '–' : String(order)], about };
  });
  const head = table(
    [{ head: 'source', left: true }, { head: 'rate' }, { head: 'order' }],
    rows.map((row) => row.left),
  );
  const indent = Math.max(...head.map((line) => [...line].length)) + 2;
  return head.flatMap((line, i) => {
    const text = i === 0 ? 'what it is' : rows[i - 1].about;
    const [first, ...more] = wrapText(text, columns - indent - 1);
    return [padRight(line, indent) + first, ...more.map((part) => ' '.repeat(indent) + part)];
  });
}

function rateText(low: number, high: number): string {
  const [from, to] = [low, high].map((rate) => rate.toFixed(6));
  return from === to ? from : `${from} to ${to}`;
}

/** Verdicts where there is no room for more. */
const VERDICT_WORDS: Readonly<Record<IntervalLine['verdict'], string>> = {
  holds: 'holds',
  misses: 'misses',
  'flagged beforehand': 'flagged',
};

/** The order that answers for a source: its own, or the highest that most runs trust where it has none. */
function shownOrders(lines: readonly IntervalLine[]): IntervalLine[] {
  const highest = lines.findLast((line) => line.trusted * 2 >= line.repetitions);
  return lines.filter(
    (line) =>
      line.against_order === 'own' ||
      line.verdict === 'misses' ||
      (line === highest && line.against_order !== 'below'),
  );
}

function intervalSection(record: CalibrationRecord, columns: number): string[] {
  const wide = columns >= WIDE;
  const head: Column[] = [
    { head: 'source', left: true },
    { head: 'symbols' },
    { head: 'order' },
    { head: 'truth' },
    { head: 'off by' },
    ...(wide ? [{ head: 'spread' }, { head: '± half' }] : []),
    { head: 'held' },
    { head: 'verdict', left: true },
  ];
  const lines: string[] = [
    ...wrapText(
      'Do the intervals of the corrected entropy hold the truth? They say 95 %. Required of trusted ones is 85 % or more and, over 200 runs, 99 % or less where the truth is no end of the scale. Held is counted among trusted ones. First the order of the source itself, then the highest that most runs trust.',
      columns - 1,
      ' ',
    ),
    '',
  ];
  const rows: string[][] = [];
  for (const { name } of record.sources) {
    const own = record.intervals.filter((line) => line.source === name);
    let before = '';
    for (const size of new Set(own.map((line) => line.symbol_count))) {
      for (const line of shownOrders(own.filter((l) => l.symbol_count === size))) {
        rows.push([
          before === name ? '' : name,
          countText(size),
          String(line.k),
          line.truth.toFixed(4),
          signedRateText(line.bias, DECIMALS),
          ...(wide
            ? [
                line.repetitions === 1 ? '–' : line.spread.toFixed(DECIMALS),
                line.half_width.toFixed(DECIMALS),
              ]
            : []),
          line.trusted === 0 ? '–' : `${line.held}/${line.trusted}`,
          wide ? line.verdict : VERDICT_WORDS[line.verdict],
        ]);
        before = name;
      }
    }
  }
  lines.push(...table(head, rows), '');
  lines.push(...wrapText(flagText(record.intervals), columns - 1, ' '));
  return lines;
}

/** How many lines were flagged beforehand, by reason. */
function flagText(lines: readonly IntervalLine[]): string {
  const flagged = lines.filter((line) => line.verdict === 'flagged beforehand');
  const thin = flagged.filter((line) => line.verdict_text.includes('not estimable')).length;
  const below = flagged.filter((line) => line.verdict_text.includes('not enough')).length;
  const others = flagged.length - thin - below;
  return `Of ${lines.length} lines over all orders, ${flagged.length} were flagged before the truth was looked at: ${thin} since the order is not estimable from so few symbols, ${below} since a higher order lies below${others === 0 ? '' : `, ${others} for other reasons`}. A flagged interval may miss.`;
}

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

function estimatorSection(record: CalibrationRecord, columns: number): string[] {
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

function coderSection({ coders, sources }: CalibrationRecord, columns: number): string[] {
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

function changeSection({ changes }: CalibrationRecord, columns: number): string[] {
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

/** Every broken promise in words. */
function missLines({ intervals, coders, changes }: CalibrationRecord): string[] {
  return [
    ...intervals
      .filter((line) => line.verdict === 'misses')
      .map(
        (l) => `${l.source}, ${countText(l.symbol_count)} symbols, order ${l.k}: ${l.verdict_text}`,
      ),
    ...coders
      .filter((line) => line.verdict === 'misses')
      .map(
        (l) =>
          `${l.source}, ${countText(l.symbol_count)} symbols, ${l.candidate}: ${l.verdict_text}`,
      ),
    ...changes
      .filter((line) => line.verdict === 'misses')
      .map(
        (l) =>
          `${l.source}, ${countText(l.symbol_count)} symbols, change found in ${l.verdict_text}`,
      ),
  ];
}

/** The screen of `bitassay calibrate`: what was promised, what is true, and a verdict on each line. */
export function calibrateScreen(
  record: CalibrationRecord,
  { columns }: CalibrateScreenOptions,
): string {
  const promises = record.intervals.length + record.coders.length + record.changes.length;
  const broken = missLines(record);
  return [
    ...wrapText(
      `${record.sources.length} ${record.sources.length === 1 ? 'source' : 'sources'} whose entropies are known by calculation; figures in bits per symbol. Drawn from the seed "${record.seed}": the same on every machine.`,
      columns - 1,
      ' ',
    ),
    '',
    ...sourceSection(record, columns),
    '',
    ...intervalSection(record, columns),
    '',
    ...estimatorSection(record, columns),
    ...coderSection(record, columns),
    ...changeSection(record, columns),
    ...(broken.length === 0
      ? [` ${countText(promises)} lines judged: no promise is broken.`]
      : [
          ` ${countText(promises)} lines judged: ${broken.length} ${broken.length === 1 ? 'promise is' : 'promises are'} broken.`,
          ...broken.flatMap((text) => wrapText(text, columns - 4, '   ')),
        ]),
    ...(record.partial ? [' Interrupted: only what was done until then is shown.'] : []),
    ...wrapText(
      'A figure from a sample, here or on your data, does not certify a safety link.',
      columns - 1,
      ' ',
    ),
    ' Next: bitassay entropy FILE',
    '',
  ].join('\n');
}
