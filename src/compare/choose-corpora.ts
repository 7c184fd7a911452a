import type { CellRecord } from '../harness/run-record.ts';
import type { CorpusChoice } from './choose-corpus.ts';
import { meetsAll } from './limits.ts';

/** One coder for all corpora: the same candidate, tables and reset on each. */
export interface SharedCoder {
  /** A cell's id without its corpus. */
  readonly coder: string;
  /** Rate over the least rate that meets the limits there, less 1, by corpus. */
  readonly regrets: ReadonlyMap<string, number>;
  /** Their mean by the corpora's weights. */
  readonly weightedRegret: number;
  readonly worstRegret: number;
}

export interface CorporaChoice {
  /** By corpus, adding up to 1. */
  readonly weights: ReadonlyMap<string, number>;
  /** Coders that meet the limits on every corpus, least weighted regret first. */
  readonly shared: readonly SharedCoder[];
  /** Of these the one whose worst corpus suffers least. */
  readonly leastWorst?: SharedCoder;
}

/** What a cell's id says besides its corpus. */
const coderOf = (cell: CellRecord): string => cell.id.slice(cell.corpus.length + 1);

/**
 * One coder for several corpora against one for each: how much more each shared coder sends on each corpus than the best that meets
 * the limits there. Where the plan
 * gives no weight at all, corpora weigh as much as their symbols; where it gives some, the others weigh 1.
 *
 * @param written  weights that the plan gives, by corpus
 * @returns undefined for a run of one corpus, or where some corpus has no cell that meets the limits
 */
export function chooseAcross(
  choices: readonly CorpusChoice[],
  symbolCounts: ReadonlyMap<string, number>,
  written: Readonly<Record<string, number>>,
): CorporaChoice | undefined {
  if (choices.length < 2) return undefined;
  const weighted = Object.keys(written).length > 0;
  const raw = choices.map(
    ({ corpus }) => written[corpus] ?? (weighted ? 1 : (symbolCounts.get(corpus) ?? 0)),
  );
  const sum = raw.reduce((a, b) => a + b, 0);
  if (sum === 0) return undefined;
  const weights = new Map(choices.map(({ corpus }, i) => [corpus, raw[i] / sum]));
  const rates = choices.map(({ alternatives }) => {
    const meeting = alternatives.filter(({ verdicts }) => meetsAll(verdicts));
    return new Map(meeting.map(({ cell }) => [coderOf(cell), cell.rate!]));
  });
  const least = rates.map((own) => Math.min(...own.values()));
  if (least.some((rate) => !Number.isFinite(rate) || rate === 0)) return undefined;
  const shared = [...rates[0].keys()]
    .filter((coder) => rates.every((own) => own.has(coder)))
    .map((coder): SharedCoder => {
      const regrets = rates.map((own, i) => own.get(coder)! / least[i] - 1);
      return {
        coder,
        regrets: new Map(choices.map(({ corpus }, i) => [corpus, regrets[i]])),
        weightedRegret: regrets.reduce((total, regret, i) => total + (regret * raw[i]) / sum, 0),
        worstRegret: Math.max(...regrets),
      };
    })
    .toSorted((a, b) => a.weightedRegret - b.weightedRegret || (a.coder < b.coder ? -1 : 1));
  const leastWorst = shared.toSorted((a, b) => a.worstRegret - b.worstRegret)[0];
  return { weights, shared, ...(leastWorst === undefined ? {} : { leastWorst }) };
}
