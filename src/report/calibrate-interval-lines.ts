import type { CalibrationRecord, IntervalLine } from '../harness/calibrate-record.ts';
import { type Column, table, WIDE } from './calibrate-table.ts';
import { countText, padRight, signedRateText, wrapText } from './figures.ts';

const DECIMALS = 5;

/** What the sources are: the rate is calculated, or bounded where it has no closed form. */
export function sourceSection({ sources }: CalibrationRecord, columns: number): string[] {
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

/** Whether the intervals of the corrected entropy hold the truth. */
export function intervalSection(record: CalibrationRecord, columns: number): string[] {
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
