import type { Ageing } from './ageing.ts';
import type { Cell } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import type { FloorOptions } from './corpus-floors.ts';
import type { DamagePlan } from './damage-experiment.ts';
import type { CellDamage } from './damage-schema.ts';
import type { FloorPieces } from './floor-pieces.ts';
import type { CellBits, CellFailure } from './run-cell.ts';
import type { CellTimes, TimingOptions } from './time-cell.ts';

/** How work that is under way is watched and stopped. */
export interface Control {
  /** Called once the work really begins: not before a worker is free for it. */
  begun?(): void;
  /** Awaited between steps of work on this thread; may throw `Interrupted`. */
  pause(): Promise<void>;
  /** Asked where the work is elsewhere. */
  interrupted(): boolean;
}

/**
 * Where the work of a run is done: on this thread, or in a pool of workers. Work may be handed over all at once; it begins in
 * the order in which it came, as soon as there is room. Nothing begins after an interrupt: it is refused with `Interrupted`.
 */
export interface Executor {
  /** Cells that are coded at a time. */
  readonly lanes: number;
  /** Trains, codes, decodes, compares and prices a cell. The units as coded are not kept. */
  cellBits(cell: Cell, corpus: CorpusData, control: Control): Promise<CellBits | CellFailure>;
  /** Times a cell while nothing else is done here; undefined where there is nothing to time. */
  cellTimes(
    cell: Cell,
    corpus: CorpusData,
    options: TimingOptions,
    control: Control,
  ): Promise<CellTimes | undefined | CellFailure>;
  /**
   * Adds to `pieces` what a floor is made of and is not there yet. Where it is interrupted, what was found stays.
   * @throws LimitError where it met a limit
   */
  floorPieces(
    corpus: CorpusData,
    options: FloorOptions,
    pieces: FloorPieces,
    control: Control,
  ): Promise<void>;
  /** How the shipped tables of a cell age; undefined where that cannot be said. */
  ageing(
    cell: Cell,
    corpus: CorpusData,
    messageEnds: Uint32Array,
    control: Control,
  ): Promise<Ageing | undefined>;
  /** What damage does to a cell, or why that could not be found out. */
  damage(
    cell: Cell,
    corpus: CorpusData,
    plan: DamagePlan,
    control: Control,
  ): Promise<readonly CellDamage[] | CellFailure>;
  /** Lets workers go. */
  close(): Promise<void>;
}
