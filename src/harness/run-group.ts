import { type Ageing, ageingRecordOf } from './ageing.ts';
import type { Cell } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import { CorpusFloors } from './corpus-floors.ts';
import type { DamagePlan } from './damage-experiment.ts';
import type { Control, Executor } from './executor.ts';
import { FloorPieces } from './floor-pieces.ts';
import { Interrupted } from './pause.ts';
import type { RunBoard } from './run-board.ts';
import type { CellBits, CellFailure } from './run-cell.ts';
import { type DamageResults, damageResults } from './run-damage.ts';
import type { RunRecord } from './run-record.ts';
import { isPlain } from './variation.ts';

/** Cells whose data have the same test part, so that one floor serves them. */
export interface CellGroup {
  /** A corpus's own data first. */
  readonly data: readonly CorpusData[];
  readonly cells: readonly Cell[];
}

/** The cells of a group that were coded, in their order, with what they are held against. */
export interface CodedGroup {
  readonly corpus: CorpusData;
  readonly results: readonly (CellBits | CellFailure)[];
  readonly floors: CorpusFloors;
  readonly ageing?: NonNullable<RunRecord['ageing']>[number];
  /** By cell id, where it was asked for. */
  readonly damage: DamageResults;
  /** Interrupted: cells, or coders run for the floor alone, are missing. */
  readonly partial: boolean;
}

/** Of what is needed to show the rest. */
const UNSTOPPED: Control = { pause: async () => {}, interrupted: () => false };

/** What the work gives, or undefined where an interrupt came first. */
async function unlessInterrupted<T>(work: Promise<T>): Promise<T | undefined> {
  try {
    return await work;
  } catch (error) {
    if (!(error instanceof Interrupted)) throw error;
    return undefined;
  }
}

/**
 * Codes the cells of a group, wherever there is room for them, then sets the floor of their data.
 * @param ages        say how shipped tables age
 * @param damagePlan  damage to simulate besides
 */
export async function codeGroup(
  { data, cells }: CellGroup,
  ages: boolean,
  executor: Executor,
  board: RunBoard,
  damagePlan?: DamagePlan,
): Promise<CodedGroup> {
  const [corpus] = data;
  const dataOf = new Map(data.map((one) => [one.key, one]));
  const outcomes = await Promise.all(
    cells.map((cell) =>
      unlessInterrupted(
        board.watch(cell.id, async (control) => {
          const result = await executor.cellBits(cell, dataOf.get(cell.dataKey)!, control);
          board.cellDone();
          return result;
        }),
      ),
    ),
  );
  const results = outcomes.filter((outcome) => outcome !== undefined);
  const pieces = new FloorPieces();
  const floors = new CorpusFloors(corpus, new Map(), pieces);
  let whole = results.length === cells.length;
  if (whole) {
    const options = floors.optionsForCells(results, true);
    const built = board.watch(`${corpus.name}: entropy`, async (control) => {
      await executor.floorPieces(corpus, options, pieces, control);
      return true;
    });
    whole = (await unlessInterrupted(built)) ?? false;
  }
  // What was coded is kept: the floor is then held by the cells themselves, without coders run for it alone.
  if (!whole && results.length > 0) {
    const options = floors.optionsForCells(results, false);
    await executor.floorPieces(corpus, options, pieces, UNSTOPPED);
  }
  await floors.buildForCells(results, whole, UNSTOPPED.pause);
  const damage: DamageResults =
    damagePlan === undefined || !whole
      ? new Map()
      : await damageResults(results, dataOf, damagePlan, executor, board);
  const shipped = ages && whole && corpus.vary === undefined ? bestShipped(results) : undefined;
  const ageing = shipped && (await ageingOf(shipped, corpus, executor, board));
  return {
    corpus,
    results,
    floors,
    ...(ageing === undefined ? {} : { ageing: ageingRecordOf(corpus.name, ageing) }),
    damage,
    partial: !whole || [...damage.values()].some((one) => one === undefined),
  };
}

function ageingOf(
  { cell, messageEnds }: CellBits,
  corpus: CorpusData,
  executor: Executor,
  board: RunBoard,
): Promise<Ageing | undefined> {
  return unlessInterrupted(
    board.watch(`${corpus.name}: ageing`, (control) =>
      executor.ageing(cell, corpus, messageEnds, control),
    ),
  );
}

/** The shipped cell of least rate, of the plan's own, that is no reference. */
function bestShipped(results: readonly (CellBits | CellFailure)[]): CellBits | undefined {
  let best: CellBits | undefined;
  for (const result of results) {
    if ('failure' in result || result.cell.policy !== 'shipped') continue;
    if (!isPlain(result.cell.vary ?? {})) continue;
    if (result.cell.candidate.declaration.reference) continue;
    if (best === undefined || result.totals.carriedBits < best.totals.carriedBits) best = result;
  }
  return best;
}
