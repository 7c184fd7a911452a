import type { CellRecord } from '../harness/run-record.ts';
import { meanLossRun } from '../statistics/gilbert-elliott.ts';
import { countText, wrapText } from './figures.ts';
import { countInText, paragraph } from './paragraph.ts';
import { type Column, textTable } from './text-table.ts';

type Damage = NonNullable<CellRecord['damage']>[number];
type Kind = Damage['kind'];

/** Most cells whose damage is told of: the best of each reset first; the others stand in the record. */
const MOST_CELLS = 6;

interface DamageRow {
  readonly cell: CellRecord;
  readonly damage: Damage;
}

interface DamageColumn extends Column {
  /** Left out first, highest first, where the screen is narrow; 0 stays always. */
  readonly spare: number;
  text(row: DamageRow): string;
}

/** Three significant digits, without an exponent. */
const digits = (value: number): string => String(Number(value.toPrecision(3)));

/** The same in a column: its zeros stand. */
function shareText(percent: number): string {
  return percent >= 1e-6 ? percent.toPrecision(3) : digits(percent);
}

/** Percent of the damages, in whole points: no more is known of them. What is not none or all never looks so. */
function percentText(part: number, whole: number): string {
  if (whole === 0) return '–';
  const percent = (100 * part) / whole;
  if (percent > 0 && percent < 1) return '<1';
  if (percent < 100 && percent > 99) return '>99';
  return percent.toFixed(0);
}

/** A mean without digits that its interval does not carry. */
function meanText({ mean, mean_error: error }: Damage['symbols_lost']): string {
  if (error === 0) return mean >= 100 ? countText(mean) : digits(mean);
  const place = Math.floor(Math.log10(error));
  if (place >= 0) return countText(Math.round(mean / 10 ** place) * 10 ** place);
  return mean.toFixed(Math.min(3, -place));
}

function columnsFor(kind: Kind, rows: readonly DamageRow[], withReset: boolean): DamageColumn[] {
  const left = (title: string, text: DamageColumn['text']): DamageColumn => ({
    title,
    right: false,
    spare: 0,
    text,
  });
  const right = (title: string, spare: number, text: DamageColumn['text']): DamageColumn => ({
    title,
    right: true,
    spare,
    text,
  });
  const seen = (
    title: string,
    key: 'detected' | 'by_check' | 'undetected' | 'harmless',
    spare = 0,
  ): DamageColumn => right(title, spare, ({ damage }) => percentText(damage[key], damage.events));
  const spreads = rows.some(({ damage }) => damage.messages_after.max > 0);
  return [
    left(' candidate', ({ cell }) => ` ${cell.candidate}`),
    left('tables', ({ cell }) => (cell.tables === 'none' ? '–' : cell.tables)),
    ...(withReset ? [left('reset', ({ cell }) => cell.reset)] : []),
    ...(kind === 'lose_messages'
      ? []
      : [right('% hit', 2, ({ damage }) => shareText(100 * damage.share))]),
    seen('decoder', 'detected'),
    seen('CRC-32', 'by_check'),
    seen('neither', 'undetected'),
    ...(rows.some(({ damage }) => damage.harmless > 0) ? [seen('harmless', 'harmless', 4)] : []),
    right('lost', 0, ({ damage }) => meanText(damage.symbols_lost)),
    right('most', 3, ({ damage }) => countText(damage.symbols_lost.max)),
    right('distance', 1, ({ damage }) =>
      damage.recovery === undefined ? '–' : countText(damage.recovery.p95),
    ),
    ...(spreads ? [right('after', 0, ({ damage }) => meanText(damage.messages_after))] : []),
  ];
}

/** The table of as many columns as the screen has room for. */
function tableWithin(
  columns: readonly DamageColumn[],
  rows: readonly DamageRow[],
  width: number,
): string[] {
  const texts = rows.map((row) => columns.map((column) => column.text(row)));
  const lines = textTable(columns, texts);
  const spare = Math.max(...columns.map((column) => column.spare));
  if (spare === 0 || lines.every((line) => [...line].length <= width)) return lines;
  return tableWithin(
    columns.filter((column) => column.spare < spare),
    rows,
    width,
  );
}

/** Half of the 95 % interval of a share of so many events, at its widest. */
function pointsText(events: number): string {
  return events === 0 ? '100' : String(Math.ceil((1.96 * 50) / Math.sqrt(events)));
}

/** What happens to the messages, and how many damages stand behind the figures. */
function titleOf(rows: readonly DamageRow[]): string {
  const [{ damage }] = rows;
  const counts = rows.map((row) => row.damage.events);
  const least = Math.min(...counts);
  const most = Math.max(...counts);
  const range = (from: string, to: string): string => (from === to ? to : `${from} to ${to}`);
  const noun = damage.kind === 'lose_messages' ? 'runs of them' : 'damaged messages';
  const events = `${range(countInText(least), countInText(most))} ${noun}, so that % are right within ${range(pointsText(most), pointsText(least))} points:`;
  if (damage.kind === 'flip')
    return `Flipped bits, each with probability ${damage.probability}; ${events}`;
  if (damage.kind === 'lose_bytes')
    return `Lost bytes, each with probability ${damage.probability}; ${events}`;
  if (damage.probability !== undefined)
    return `Lost messages, each with probability ${damage.probability}; ${events}`;
  const [toBad, toGood, inBad, inGood] = [
    damage.good_to_bad!,
    damage.bad_to_good!,
    damage.lost_in_bad!,
    damage.lost_in_good!,
  ];
  const run = meanLossRun({
    goodToBad: toBad,
    badToGood: toGood,
    lostInBad: inBad,
    lostInGood: inGood,
  });
  return `Lost messages, Gilbert–Elliott: good to bad ${toBad}, bad to good ${toGood}, lost in bad ${inBad}, in good ${inGood}; that is ${digits(100 * damage.share)} % of all, ${digits(run)} in a row on average; ${events}`;
}

/** The best of each reset, then the best of all, in the order of their rates. */
function shownOf(cells: readonly CellRecord[]): CellRecord[] {
  const sorted = [...cells].sort((a, b) => a.rate! - b.rate! || (a.id < b.id ? -1 : 1));
  const resets = new Set<string>();
  const first = sorted.filter(({ reset }) => !resets.has(reset) && resets.add(reset));
  const shown = new Set([...new Set([...first, ...sorted])].slice(0, MOST_CELLS));
  return sorted.filter((cell) => shown.has(cell));
}

/**
 * What damage does to the coded messages of a corpus, a table a kind; nothing where the plan does not ask.
 * @param noun  of a symbol, as in "bits/byte"
 */
export function damageLines(cells: readonly CellRecord[], noun: string, columns: number): string[] {
  const failures = cells
    .filter((cell) => cell.damage_failure !== undefined)
    .flatMap((cell) => wrapText(`! ${cell.id}: no damage. ${cell.damage_failure}`, columns));
  const all = cells.filter((cell) => cell.damage !== undefined && !cell.reference);
  const shown = shownOf(all);
  const kinds = [...new Set(shown.flatMap(({ damage }) => damage!.map(({ kind }) => kind)))];
  if (kinds.length === 0) return failures;
  const withReset = new Set(shown.map(({ reset }) => reset)).size > 1;
  const tables = kinds.map((kind) => {
    const rows = shown.flatMap((cell) =>
      cell.damage!.filter((d) => d.kind === kind).map((damage) => ({ cell, damage })),
    );
    const table = tableWithin(columnsFor(kind, rows, withReset), rows, columns);
    return { lines: [...paragraph(titleOf(rows), columns), '', ...table, ''], head: table[0] };
  });
  const heads = tables.map(({ head }) => head).join('\n');
  const rest = all.length - shown.length;
  const note = [
    'Damage, simulated, one at a time. In % of damages, who sees it: the decoder, by an error; only a CRC-32 of the symbols of each message, if there were one; neither, though symbols are lost.',
    heads.includes('harmless') ? 'Harmless: every symbol came out right.' : '',
    heads.includes('% hit') ? '% hit: of all messages.' : '',
    `Lost: ${noun}s missing or wrong at their place, on average${heads.includes('most') ? ', and most' : ''}; all of what cannot be decoded where the decoder stops.`,
    heads.includes('distance')
      ? `Distance: ${noun}s from the first wrong one until all are right again, at most in 95 % of damages.`
      : '',
    heads.includes('after') ? 'After: messages spoiled behind the damaged ones, on average.' : '',
    'A message that decodes alone is taken to arrive by itself, its beginning known.',
    rest === 0 ? '' : `${rest === 1 ? 'The other cell' : `The other ${rest} cells`}: run record.`,
  ].filter((text) => text !== '');
  const caution = [
    'What only a CRC-32 would see reaches the product as data unless the link or the container checks it.',
    kinds.includes('lose_messages')
      ? 'That a message is missing, no check of the others shows: the link must count them.'
      : '',
    "Figures of a model and a sample: they replace neither your link's own protection nor its certification.",
  ].filter((text) => text !== '');
  return [
    '',
    ...paragraph(note.join(' '), columns),
    '',
    ...tables.flatMap(({ lines }) => lines),
    ...paragraph(caution.join(' '), columns),
    ...failures,
  ];
}
