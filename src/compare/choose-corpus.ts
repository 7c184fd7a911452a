import type { MessagePairs } from '../harness/run-all.ts';
import type { CellRecord, RunRecord } from '../harness/run-record.ts';
import { CellFigures, type DeviceEnd } from './cell-figures.ts';
import { ranksOf } from './compare-run.ts';
import { tradeOffFront } from './front.ts';
import { judge, type Limits, type LimitVerdict, meetsAll } from './limits.ts';
import {
  type BreakEven,
  breakEvens,
  type CostTerms,
  type YearlyCost,
  yearlyCost,
} from './yearly-cost.ts';

/** What a choice is made by. */
export interface ChoiceTerms {
  readonly limits: Limits;
  readonly cost: CostTerms;
  readonly end: DeviceEnd;
}

/** What is made as small, or as large, as the limits allow. */
export type Goal = 'yearly cost' | 'units per message' | 'rate';

/** A cell with all that a choice needs to know of it. */
export interface Alternative {
  readonly cell: CellRecord;
  readonly figures: CellFigures;
  readonly verdicts: readonly LimitVerdict[];
  readonly meets: boolean;
  /** Equal for what the corpus cannot tell apart. */
  readonly rank?: number;
  readonly cost?: YearlyCost;
  /** Of the cells on the front; the front's member that dominates any other. */
  readonly onFront: boolean;
  readonly dominatedBy?: string;
}

/** How near a cell that breaks limits comes to meeting them. */
export interface NearMiss {
  readonly id: string;
  /** The limits that would have to give, and to what; a text where no number would help. */
  readonly gives: readonly {
    readonly key: string;
    readonly limit: number | string;
    readonly needed: number | string;
  }[];
  /** Sum over them of the excess as a share of the limit; infinite where no number helps. */
  readonly excess: number;
}

export interface CorpusChoice {
  readonly corpus: string;
  readonly goal: Goal;
  /** Every cell that could be picked: verified, no reference, of the plan's own variation. */
  readonly alternatives: readonly Alternative[];
  /** Absent where nothing meets the limits. */
  readonly pick?: Alternative;
  readonly runnerUp?: Alternative;
  /** Cells that the corpus cannot tell from the best, and among which memory and speed decided. */
  readonly tiedWith: readonly string[];
  /** At most three, where nothing meets the limits. */
  readonly nearest: readonly NearMiss[];
  readonly breakEvens: readonly BreakEven[];
}

/** Best first: the goal, then what takes less memory, then the faster, then the id. */
function goalOf(cells: readonly CellRecord[], cost: CostTerms): Goal {
  if (cells.some((cell) => yearlyCost(cell, cost) !== undefined)) return 'yearly cost';
  return cells.some((cell) => cell.units_per_message !== undefined) ? 'units per message' : 'rate';
}

/** What a goal makes small. */
function goalValue(cell: CellRecord, goal: Goal, cost: CostTerms): number {
  if (goal === 'yearly cost') return yearlyCost(cell, cost)?.cost ?? Number.POSITIVE_INFINITY;
  if (goal === 'units per message') return -(cell.units_per_message?.mean ?? 0);
  return cell.rate ?? Number.POSITIVE_INFINITY;
}

function memoryOf({ figures }: Pick<Alternative, 'figures'>): number {
  const [flash, ram] = [figures.of('flash_bytes'), figures.of('ram_bytes')];
  return (flash?.value ?? Number.POSITIVE_INFINITY) + (ram?.value ?? 0);
}

function speedOf({ figures }: Pick<Alternative, 'figures'>, end: DeviceEnd): number {
  return figures.of(end === 'decoder' ? 'decode_speed' : 'encode_speed')?.value ?? 0;
}

/**
 * The alternative to pick among those that meet the limits: the best by the goal, but where others share its rank, so that the corpus
 * cannot tell them apart, the one of them that takes least memory, then the fastest.
 */
export function pickAmong(
  meeting: readonly Alternative[],
  goal: Goal,
  { cost, end }: ChoiceTerms,
): { pick?: Alternative; runnerUp?: Alternative; tiedWith: string[] } {
  const byGoal = meeting.toSorted(
    (a, b) =>
      goalValue(a.cell, goal, cost) - goalValue(b.cell, goal, cost) ||
      memoryOf(a) - memoryOf(b) ||
      speedOf(b, end) - speedOf(a, end) ||
      (a.cell.id < b.cell.id ? -1 : 1),
  );
  const [best] = byGoal;
  if (best === undefined) return { tiedWith: [] };
  const tied = byGoal.filter((a) => a === best || (a.rank !== undefined && a.rank === best.rank));
  const byMemory = tied.toSorted(
    (a, b) =>
      memoryOf(a) - memoryOf(b) ||
      goalValue(a.cell, goal, cost) - goalValue(b.cell, goal, cost) ||
      speedOf(b, end) - speedOf(a, end),
  );
  const pick = byMemory[0];
  const runnerUp = byGoal.find((a) => a !== pick);
  return {
    pick,
    ...(runnerUp === undefined ? {} : { runnerUp }),
    tiedWith: tied.filter((a) => a !== pick).map((a) => a.cell.id),
  };
}

function nearMissOf({ cell, verdicts }: Alternative): NearMiss {
  let excess = 0;
  const gives = verdicts.flatMap(({ key, limit, verdict, value, margin }) => {
    if (verdict === 'pass') return [];
    excess +=
      typeof limit === 'number' && margin !== undefined ? -margin : Number.POSITIVE_INFINITY;
    return [{ key, limit, needed: value ?? 'not measured' }];
  });
  return { id: cell.id, gives, excess };
}

const NEAREST = 3;

/** Cells that a choice may fall on: verified, no references, and what the plan does not vary. */
function choosable(record: RunRecord, corpus: string): CellRecord[] {
  return record.cells.filter(
    (cell) => cell.corpus === corpus && cell.verified && !cell.reference && cell.vary === undefined,
  );
}

function frontOf(
  alternatives: readonly Omit<Alternative, 'onFront'>[],
  goal: Goal,
  terms: ChoiceTerms,
) {
  const values = (key: Parameters<CellFigures['of']>[0]) =>
    alternatives.map(({ figures }) => figures.of(key)?.value);
  const cycles = values('cycles_per_symbol');
  const speed = terms.end === 'decoder' ? 'decode_speed' : 'encode_speed';
  return tradeOffFront(alternatives.length, [
    goal === 'units per message'
      ? { name: 'units per message', better: 'more', values: values('units_per_message') }
      : { name: 'rate', better: 'less', values: values('rate') },
    cycles.some((value) => value !== undefined)
      ? { name: 'cycles_per_symbol', better: 'less', values: cycles }
      : { name: speed, better: 'more', values: values(speed) },
    { name: 'flash_bytes', better: 'less', values: values('flash_bytes') },
    { name: 'ram_bytes', better: 'less', values: values('ram_bytes') },
  ]);
}

/** The choice for one corpus of a run. */
export function chooseForCorpus(
  record: RunRecord,
  messages: ReadonlyMap<string, MessagePairs>,
  corpus: string,
  terms: ChoiceTerms,
): CorpusChoice {
  const cells = choosable(record, corpus);
  const goal = goalOf(cells, terms.cost);
  const { rankOf } = ranksOf(record, messages);
  const sampled = record.corpora.find(({ name }) => name === corpus)?.sample !== undefined;
  const judged = cells.map((cell) => {
    const figures = new CellFigures(cell, messages.get(cell.id), terms.end, sampled);
    const verdicts = judge(figures, terms.limits);
    const rank = rankOf.get(cell.id);
    const cost = yearlyCost(cell, terms.cost);
    return {
      cell,
      figures,
      verdicts,
      meets: meetsAll(verdicts),
      ...(rank === undefined ? {} : { rank }),
      ...(cost === undefined ? {} : { cost }),
    };
  });
  const front = frontOf(judged, goal, terms);
  const alternatives = judged.map((alternative, i): Alternative => {
    const by = front.dominatedBy[i];
    return {
      ...alternative,
      onFront: by < 0,
      ...(by < 0 ? {} : { dominatedBy: judged[by].cell.id }),
    };
  });
  const meeting = alternatives.filter(({ meets }) => meets);
  return {
    corpus,
    goal,
    alternatives,
    ...pickAmong(meeting, goal, terms),
    nearest:
      meeting.length > 0
        ? []
        : alternatives
            .map(nearMissOf)
            .toSorted((a, b) => a.excess - b.excess || a.gives.length - b.gives.length)
            .slice(0, NEAREST),
    breakEvens: breakEvensOf(alternatives, terms.cost),
  };
}

function breakEvensOf(alternatives: readonly Alternative[], terms: CostTerms): BreakEven[] {
  const priced = alternatives.flatMap(({ cell, cost, figures, onFront, meets }) => {
    const [flash, ram] = [figures.of('flash_bytes'), figures.of('ram_bytes')];
    if (!onFront || !meets || cost === undefined || flash === undefined || ram === undefined)
      return [];
    return [{ id: cell.id, cost: cost.cost, flashBytes: flash.value, ramBytes: ram.value }];
  });
  return breakEvens(priced, terms.devices ?? 1);
}
