import { LINE_LETTERS } from '../account/bit-account.ts';
import type { LineDifference, Why } from '../compare/why.ts';
import type { RunRecord } from '../harness/run-record.ts';
import { rateText, signedRateText, symbolNoun } from './figures.ts';
import { cellPhrase } from './floor-lines.ts';
import { paragraph } from './paragraph.ts';
import { textTable } from './text-table.ts';

const DECIMALS = 3;

/** What each line of the account would be repaired by, in half a sentence. */
const CAUSES: Readonly<Record<string, string>> = {
  opening: 'how its messages start without context',
  structure: 'what its order or class cannot express',
  learning: 'what it loses while it adapts, or to tables of other data',
  model: 'its model, class and learning together',
  above_floor: 'all it has above the floor, which cannot be split',
  rounding: 'whole-bit words or quantised tables',
  tables: 'the tables it sends',
  index: 'selectors and jump tables',
  framing: 'how it tells its lengths',
  ends: 'how its messages end',
  check: 'its checks',
};

function sentence(why: Why, noun: string): string {
  const { a, b, difference, comparison } = why;
  // The interval of the comparison is that of b − a.
  const ends = [comparison?.low ?? 0, comparison?.high ?? 0].map((end) =>
    difference >= 0 ? end : -end,
  );
  const interval =
    comparison === undefined
      ? '; these data give no interval'
      : ` (${rateText(Math.min(...ends), DECIMALS)} to ${rateText(Math.max(...ends), DECIMALS)}, over ${comparison.units} ${comparison.unit}${comparison.decided ? '' : ', which does not decide'})`;
  const [first, last] = difference >= 0 ? [b, a] : [a, b];
  return `${cellPhrase(first)} needs ${rateText(Math.abs(difference), DECIMALS)} bits per ${noun} more than ${cellPhrase(last)}${interval}.`;
}

/** The paragraph: which lines make the difference. */
function explanation({ lines, difference }: Why): string {
  const sign = Math.sign(difference) || 1;
  const gap = ({ a, b }: LineDifference) => sign * (b - a);
  const total = Math.abs(difference);
  const main = lines.filter((line) => gap(line) > 0.1 * total).toSorted((x, y) => gap(y) - gap(x));
  const against = lines
    .filter((line) => gap(line) < -0.1 * total)
    .toSorted((x, y) => gap(x) - gap(y));
  const words = (line: LineDifference) =>
    `${CAUSES[line.line]} (${rateText(Math.abs(gap(line)), DECIMALS)})`;
  if (total === 0) return 'Both carry the same number of bits.';
  const lead =
    main.length === 0
      ? 'No line of the account stands out'
      : `The difference is ${main.map(words).join('; then ')}`;
  return against.length === 0
    ? `${lead}.`
    : `${lead}. It is less than that since the other pays more for ${against.map(words).join('; and ')}.`;
}

/** The screen of `bitassay choose --why A B`. */
export function whyScreen(record: RunRecord, why: Why, columns: number): string {
  const { a, b, lines } = why;
  const corpus = record.corpora.find(({ name }) => name === a.corpus)!;
  const noun = symbolNoun(corpus.symbols_as);
  const rows = lines.map((line) => [
    line.line.replace('_', ' '),
    LINE_LETTERS[line.line as keyof typeof LINE_LETTERS],
    rateText(line.a, DECIMALS),
    rateText(line.b, DECIMALS),
    signedRateText(line.b - line.a, DECIMALS),
  ]);
  rows.push([
    'rate',
    '',
    rateText(a.rate!, DECIMALS),
    rateText(b.rate!, DECIMALS),
    signedRateText(b.rate! - a.rate!, DECIMALS),
  ]);
  return `${[
    ` A  ${cellPhrase(a)}`,
    ` B  ${cellPhrase(b)}`,
    '',
    ...paragraph(sentence(why, noun), columns),
    ...paragraph(explanation(why), columns),
    '',
    ...textTable(
      [
        { title: `bits per ${noun}`, right: false },
        { title: '', right: false },
        { title: 'A', right: true },
        { title: 'B', right: true },
        { title: 'B − A', right: true },
      ],
      rows,
    ),
    '',
    ...paragraph(
      'Lines of the account are over the floor, an estimate, so that they move together if it is off; their differences do not.',
      columns,
    ),
  ].join('\n')}\n`;
}
