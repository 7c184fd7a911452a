import type { MessagePairs } from '../harness/run-all.ts';
import type { RunRecord } from '../harness/run-record.ts';
import { holmAdjusted } from '../statistics/holm.ts';
import { APART_AT, type Comparison, compareBlocks, signFlipP } from './compare-cells.ts';
import { type ComparisonUnit, LEAST_BLOCKS } from './comparison-blocks.ts';
import { type Contender, type ContenderGroup, contenderGroups } from './contenders.ts';
import { equalRanks } from './equal-ranks.ts';

/** How the cells of one group were ranked, or why they were not. */
export interface RankedGroup {
  readonly corpus: string;
  /** What the plan varies, as it stands in the ids of the cells: `+train_share=0.1`; empty for most. */
  readonly variation: string;
  /** Ids of the cells without their fold, least rate first. */
  readonly cells: readonly string[];
  readonly units: number;
  readonly unit: ComparisonUnit;
  /** Pairs of cells of all ranked groups of this variation, over which p-values were adjusted. */
  readonly pairs: number;
  /** Present where there are too few units to tell any pair apart: how many it takes. The cells then have no ranks. */
  readonly unitsNeeded?: number;
}

export interface Ranks {
  /** By the id of each cell; where there are folds, also by the id without its fold. */
  readonly rankOf: ReadonlyMap<string, number>;
  readonly groups: readonly RankedGroup[];
}

/** What a run says of its cells beside one another. */
export interface RunComparison {
  /** In each group the cell of least rate against every other, nearest first. */
  readonly comparisons: readonly Comparison[];
  readonly ranks: Ranks;
}

/** Fewest units over which one pair of this many could be told apart, were all differences of one sign. */
function unitsNeeded(pairs: number): number {
  return Math.max(LEAST_BLOCKS, Math.ceil(1 + Math.log2(pairs / APART_AT)));
}

/** Where the pair of contenders i < j stands in the list of pairs 0-1, 0-2, 1-2, 0-3 … */
const pairAt = (i: number, j: number): number => (j * (j - 1)) / 2 + i;

const pairCount = (contenders: number): number => (contenders * (contenders - 1)) / 2;

interface TestedGroup {
  readonly group: ContenderGroup;
  readonly pairs: number;
  /** Of each pair, on its own; none where there are too few blocks for an interval. */
  readonly ps: Float64Array;
  /** There are blocks enough to tell a pair apart. */
  readonly ranked: boolean;
}

interface AdjustedGroup extends TestedGroup {
  readonly adjusted: Float64Array;
  /** Pairs adjusted for, in all ranked groups of the same variation. */
  readonly familyPairs: number;
}

function testedGroup(group: ContenderGroup): TestedGroup {
  const { contenders, blocks } = group;
  const pairs = pairCount(contenders.length);
  const ps = new Float64Array(blocks.count < LEAST_BLOCKS ? 0 : pairs);
  for (let j = 1; ps.length > 0 && j < contenders.length; j++) {
    for (let i = 0; i < j; i++)
      ps[pairAt(i, j)] = signFlipP(contenders[i].blockBits, contenders[j].blockBits);
  }
  return { group, pairs, ps, ranked: pairs === 0 || blocks.count >= unitsNeeded(pairs) };
}

/** Groups of one variation, whose ranked ones are adjusted for together. */
function withAdjusted(groups: readonly TestedGroup[]): AdjustedGroup[] {
  const all = holmAdjusted(groups.filter(({ ranked }) => ranked).flatMap(({ ps }) => [...ps]));
  let from = 0;
  return groups.map((one) => {
    if (!one.ranked) {
      // Nothing here can be decided, whatever else it were adjusted for.
      const adjusted = one.ps.map((p) => Math.min(1, p * one.pairs));
      return { ...one, adjusted, familyPairs: all.length };
    }
    const adjusted = all.subarray(from, from + one.ps.length);
    from += one.ps.length;
    return { ...one, adjusted, familyPairs: all.length };
  });
}

function foldsOf(a: Contender, b: Contender): Pick<Comparison, 'folds'> {
  const count = a.foldBits.length;
  if (count === 1) return {};
  const differences = b.foldBits.map((bits, i) => bits - a.foldBits[i]);
  const sign = Math.sign(differences.reduce((sum, difference) => sum + difference, 0));
  return {
    folds: { count, sameSign: differences.filter((own) => Math.sign(own) === sign).length },
  };
}

function comparisonsOf({ group, ps, adjusted }: AdjustedGroup): Comparison[] {
  const [best, ...others] = group.contenders;
  if (group.blocks.count < LEAST_BLOCKS) return [];
  return others.map((other, i) => {
    const at = pairAt(0, i + 1);
    return {
      ...compareBlocks(group.corpus, best, other, group.blockSymbols, group.blocks.unit),
      p: ps[at],
      adjustedP: adjusted[at],
      decided: adjusted[at] <= APART_AT,
      ...foldsOf(best, other),
    };
  });
}

/** All groups, those of one variation after one another. */
function adjustedGroups(
  record: RunRecord,
  messages: ReadonlyMap<string, MessagePairs>,
): AdjustedGroup[] {
  const groups = contenderGroups(record, messages).map(testedGroup);
  const variations = new Set(groups.map(({ group }) => group.variation));
  return [...variations].flatMap((variation) =>
    withAdjusted(groups.filter(({ group }) => group.variation === variation)),
  );
}

function ranksFrom(groups: readonly AdjustedGroup[]): Ranks {
  const rankOf = new Map<string, number>();
  for (const { group, adjusted, ranked } of groups) {
    if (!ranked) continue;
    const { contenders } = group;
    const apart = (i: number, j: number) => adjusted[pairAt(i, j)] <= APART_AT;
    equalRanks(contenders.length, apart).forEach((rank, i) => {
      for (const id of [contenders[i].id, ...contenders[i].cellIds]) rankOf.set(id, rank);
    });
  }
  return {
    rankOf,
    groups: groups.map(({ group, pairs, ranked, familyPairs }) => ({
      corpus: group.corpus,
      variation: group.variation,
      cells: group.contenders.map((contender) => contender.id),
      units: group.blocks.count,
      unit: group.blocks.unit,
      pairs: familyPairs,
      ...(ranked ? {} : { unitsNeeded: unitsNeeded(pairs) }),
    })),
  };
}

/**
 * Compares the verified cells of a run that are no references, corpus by corpus.
 *
 * Two cells are told apart where the sign-flip p-value of their block differences, adjusted by Holm's procedure for **all
 * pairs of cells of all corpora of the run**, is at most 0.05: the chance that any cell is told from an equal one is then
 * at most 5 %. Pairs with the best cell alone would be fewer, but which cell is best was itself picked from the data. What
 * the plan varies is looked at for itself: cells of another variation are no pairs beside those of the plan's own. Ranks
 * follow {@link equalRanks}, over rates. With folds, the messages of all folds stand one after another, and all cells of a
 * candidate have one rank.
 *
 * A group of so few units that none of its pairs could be told apart makes no comparison that counts, and has no ranks.
 * @param messages  by cell id; cells without figures are left out
 * Cost: 2^13 steps for each pair whose differences are not all of one sign, 2000 · 24 draws for each cell.
 */
export function compareRun(
  record: RunRecord,
  messages: ReadonlyMap<string, MessagePairs>,
): RunComparison {
  const groups = adjustedGroups(record, messages);
  return { comparisons: groups.flatMap(comparisonsOf), ranks: ranksFrom(groups) };
}

/** The ranks of a run's cells, as {@link compareRun} finds them, without its intervals. */
export function ranksOf(record: RunRecord, messages: ReadonlyMap<string, MessagePairs>): Ranks {
  return ranksFrom(adjustedGroups(record, messages));
}
