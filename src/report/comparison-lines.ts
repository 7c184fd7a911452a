import type { Comparison } from '../compare/compare-cells.ts';
import type { RankedGroup, RunComparison } from '../compare/compare-run.ts';
import { MOST_BLOCKS } from '../compare/comparison-blocks.ts';
import { partsOfId } from '../compare/contenders.ts';
import type { CorpusRecord, RunRecord } from '../harness/run-record.ts';
import { countText, rateText, signedRateText, symbolNoun, wrapText } from './figures.ts';
import { cellPhrase } from './floor-lines.ts';
import { CUT } from './spelled-gap.ts';
import { textTable } from './text-table.ts';

/** Most pairs with folds that a screen tells. */
const MOST_FOLDED = 5;

/** Why the cells of a group have no ranks. */
function noRanks({ units, unit, unitsNeeded, cells }: RankedGroup): string {
  if (units === 1 && unit === 'messages') {
    return 'No ranks: one message has no interval. Name more data, or cut it into messages (messages: every=N; under reset: never coders run on over their ends).';
  }
  const pairs = (cells.length * (cells.length - 1)) / 2;
  const enough =
    unitsNeeded! > MOST_BLOCKS
      ? 'take fewer cells'
      : `it takes ${unitsNeeded}${pairs === 1 ? '' : ', or fewer cells'}`;
  return `No ranks: ${units} ${unit} cannot tell ${pairs === 1 ? 'two cells' : `${countText(pairs)} pairs of cells`} apart; ${enough}.`;
}

/** Whether a cell has a better rank than one of a lower rate. */
function turnsBack({ cells }: RankedGroup, rankOf: ReadonlyMap<string, number>): boolean {
  return cells.some((id, i) => i > 0 && rankOf.get(id)! < rankOf.get(cells[i - 1])!);
}

function rankNotes(groups: readonly RankedGroup[], rankOf: ReadonlyMap<string, number>): string[] {
  const several = groups.filter((group) => group.cells.length > 1);
  const ranked = several.find((group) => group.unitsNeeded === undefined);
  const notes = new Set(
    several.filter((group) => group.unitsNeeded !== undefined).map((group) => noRanks(group)),
  );
  if (ranked === undefined) return [...notes];
  const { units, unit, pairs } = ranked;
  const back = several.some((group) => turnsBack(group, rankOf))
    ? ' A better rank may stand below a worse one: the more bits swing from block to block, the harder cells are to tell apart.'
    : '';
  return [
    `Cells share a rank where this corpus cannot tell them from the first of that rank (sign-flip test over ${units} ${unit}, 95 %${pairs > 1 ? `, Holm-adjusted for the ${countText(pairs)} pairs of cells of this run` : ''}).${back}`,
    ...notes,
  ];
}

const DRIFTS = 'drifts from block to block, so the interval may be too narrow';

/** The nearest pair that is told apart in a sentence; intervals are each pair's own. */
function comparisonText(
  { a, b, difference, low, high, units, unit, drifts }: Comparison,
  phrase: (id: string) => string,
  noun: string,
): string {
  return `${phrase(b)} needs ${rateText(difference)} bits/${noun} more than ${phrase(a)} (${rateText(low)} to ${rateText(high)}, over ${units} ${unit}${drifts ? `; it ${DRIFTS}` : ''}).`;
}

/** Room for the figures of a pair with folds, their blanks included. */
const FOLD_FIGURES = 46;

const cutTo = (text: string, most: number): string =>
  [...text].length <= most ? text : `${[...text].slice(0, most - 1).join('')}${CUT}`;

/** The nearest pairs with the best cell, told apart or not, and in how many folds each difference had its sign. */
function foldTable(
  pairs: readonly Comparison[],
  phrase: (id: string) => string,
  noun: string,
  columns: number,
): string[] {
  const [{ a, units, unit }] = pairs;
  const drifting = pairs.some(({ drifts }) => drifts);
  const head = `More bits/${noun} than ${phrase(a)}, over ${units} ${unit}, and the folds in which the difference had that sign.${drifting ? ` Where marked ~ it ${DRIFTS}.` : ''}`;
  const signed = (rate: number): string => signedRateText(rate, 3);
  const table = textTable(
    [
      { title: ' cell', right: false },
      { title: 'more', right: true },
      { title: '95 % interval', right: true },
      { title: '', right: false },
      { title: 'same sign', right: true },
    ],
    pairs.map(({ b, difference, low, high, drifts, folds }) => [
      ` ${cutTo(phrase(b), columns - FOLD_FIGURES)}`,
      signed(difference),
      `${signed(low)} to ${signed(high)}`,
      drifts ? '~' : '',
      `${folds!.sameSign} of ${folds!.count}`,
    ]),
  );
  return [...wrapText(head, columns - 1, ' '), '', ...table, ''];
}

/** What ranks rest on, and how much more the nearest cell needs that is told from the best; with folds the nearest few. */
export function comparisonLines(
  record: RunRecord,
  { name, symbols_as }: CorpusRecord,
  { comparisons, ranks }: RunComparison,
  columns: number,
): string[] {
  // What the plan varies is told by its curves.
  const groups = ranks.groups.filter((group) => group.corpus === name && group.variation === '');
  const own = comparisons.filter(
    (comparison) => comparison.corpus === name && partsOfId(comparison.b).variation === '',
  );
  const phrase = (id: string): string => {
    const cell = record.cells.find((c) => partsOfId(c.id).base === id);
    return cell === undefined ? id : cellPhrase(cell);
  };
  const noun = symbolNoun(symbols_as);
  const wrap = (text: string): string[] => wrapText(text, columns - 1, ' ');
  const notes = rankNotes(groups, ranks.rankOf).flatMap(wrap);
  const folded = own.filter((comparison) => comparison.folds !== undefined).slice(0, MOST_FOLDED);
  if (folded.length > 0) return [...foldTable(folded, phrase, noun, columns), ...notes];
  const nearest = own.find((comparison) => comparison.decided);
  return nearest === undefined ? notes : [...notes, ...wrap(comparisonText(nearest, phrase, noun))];
}
