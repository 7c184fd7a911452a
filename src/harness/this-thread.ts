import { BitassayError } from '../errors/errors.ts';
import { type Ageing, ageingOf } from './ageing.ts';
import type { Cell } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import { CorpusFloors, type FloorOptions } from './corpus-floors.ts';
import { damageCell } from './damage-cell.ts';
import type { DamagePlan } from './damage-experiment.ts';
import type { CellDamage } from './damage-schema.ts';
import type { Control, Executor } from './executor.ts';
import type { FloorPieces } from './floor-pieces.ts';
import { Lanes } from './lanes.ts';
import { Interrupted } from './pause.ts';
import { type CellBits, type CellFailure, placeOf, runCell } from './run-cell.ts';
import { type CellTimes, type TimingOptions, timeCell } from './time-cell.ts';

/**
 * Does the work on this thread, one after another: quick to start, for small data. A coder that hangs, or ends the process,
 * takes the run with it; one that throws something other than an error of this program ends the run.
 */
export class ThisThread implements Executor {
  readonly lanes = 1;
  readonly #lanes = new Lanes(1);

  cellBits(cell: Cell, corpus: CorpusData, control: Control): Promise<CellBits | CellFailure> {
    return this.#next(control, async () => {
      const result = await runCell(cell, corpus, control.pause);
      // Letting the coded units go keeps memory to one cell's.
      return 'failure' in result ? result : { ...result, units: [] };
    });
  }

  cellTimes(
    cell: Cell,
    corpus: CorpusData,
    options: TimingOptions,
    control: Control,
  ): Promise<CellTimes | undefined | CellFailure> {
    return this.#next(control, async () => {
      await control.pause();
      try {
        return timeCell(cell, corpus, options);
      } catch (error) {
        if (!(error instanceof BitassayError)) throw error;
        return { cell, failure: `when it was timed: ${error.message}` };
      }
    });
  }

  floorPieces(
    corpus: CorpusData,
    options: FloorOptions,
    pieces: FloorPieces,
    control: Control,
  ): Promise<void> {
    return this.#next(control, () =>
      new CorpusFloors(corpus, new Map(), pieces).build(options, control.pause),
    );
  }

  ageing(
    cell: Cell,
    corpus: CorpusData,
    messageEnds: Uint32Array,
    control: Control,
  ): Promise<Ageing | undefined> {
    return this.#next(control, async () => {
      await control.pause();
      return ageingOf(cell, corpus, messageEnds);
    });
  }

  damage(
    cell: Cell,
    corpus: CorpusData,
    plan: DamagePlan,
    control: Control,
  ): Promise<readonly CellDamage[] | CellFailure> {
    return this.#next(control, async () => {
      try {
        return await damageCell(cell, corpus, plan, control.pause);
      } catch (error) {
        if (!(error instanceof BitassayError)) throw error;
        return { cell, failure: `${error.message}${placeOf(error)}` };
      }
    });
  }

  async close(): Promise<void> {}

  #next<T>(control: Control, work: () => Promise<T>): Promise<T> {
    return this.#lanes.run(async () => {
      if (control.interrupted()) throw new Interrupted();
      control.begun?.();
      return work();
    });
  }
}
