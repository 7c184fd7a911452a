import type { Ageing } from './ageing.ts';
import type { CacheKeys } from './cache-key.ts';
import type { CacheStore } from './cache-store.ts';
import type { Cell } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import type { FloorOptions } from './corpus-floors.ts';
import type { DamagePlan } from './damage-experiment.ts';
import type { CellDamage } from './damage-schema.ts';
import type { Control, Executor } from './executor.ts';
import type { FloorPieces } from './floor-pieces.ts';
import { Interrupted } from './pause.ts';
import type { CellBits, CellFailure } from './run-cell.ts';
import type { CellTimes, TimingOptions } from './time-cell.ts';

/** A cell's bits without what the run has anyway. */
type KeptBits = Omit<CellBits, 'cell' | 'units' | 'messageEnds'> & {
  readonly messageEnds?: Uint32Array;
};

/**
 * Takes figures that an earlier run left in the cache, and leaves there what is computed, each as soon as it is there: a run
 * that was killed goes on where it ended. Failures are not kept, since a budget or a busy machine may be behind them, nor are
 * times.
 */
export class CachedExecutor implements Executor {
  readonly #inner: Executor;
  readonly #store: CacheStore;
  readonly #keys: CacheKeys;
  readonly #fresh: boolean;
  #cellsTaken = 0;

  /** @param fresh  take nothing, only leave */
  constructor(inner: Executor, store: CacheStore, keys: CacheKeys, fresh = false) {
    this.#inner = inner;
    this.#store = store;
    this.#keys = keys;
    this.#fresh = fresh;
  }

  get lanes(): number {
    return this.#inner.lanes;
  }

  /** Cells whose bits came from the cache. */
  get cellsTaken(): number {
    return this.#cellsTaken;
  }

  async cellBits(
    cell: Cell,
    corpus: CorpusData,
    control: Control,
  ): Promise<CellBits | CellFailure> {
    const key = this.#keys.ofCell('bits', cell, corpus);
    const known = await this.#take<KeptBits>(key);
    if (known !== undefined) {
      if (control.interrupted()) throw new Interrupted();
      this.#cellsTaken++;
      return { messageEnds: corpus.test.messageEnds, ...known, cell, units: [] };
    }
    const result = await this.#inner.cellBits(cell, corpus, control);
    if ('failure' in result) return result;
    const { cell: _, units: __, messageEnds, ...rest } = result;
    const kept: KeptBits = corpus.fill === undefined ? rest : { ...rest, messageEnds };
    await this.#store.put(key, kept);
    return result;
  }

  cellTimes(
    cell: Cell,
    corpus: CorpusData,
    options: TimingOptions,
    control: Control,
  ): Promise<CellTimes | undefined | CellFailure> {
    return this.#inner.cellTimes(cell, corpus, options, control);
  }

  async floorPieces(
    corpus: CorpusData,
    options: FloorOptions,
    pieces: FloorPieces,
    control: Control,
  ): Promise<void> {
    const key = this.#keys.ofFloors(corpus);
    const known = await this.#take<Map<string, unknown>>(key);
    if (known !== undefined) pieces.add(known);
    const before = pieces.size;
    try {
      await this.#inner.floorPieces(corpus, options, pieces, control);
    } finally {
      if (pieces.size > before) await this.#store.put(key, pieces.asMap());
    }
  }

  async ageing(
    cell: Cell,
    corpus: CorpusData,
    messageEnds: Uint32Array,
    control: Control,
  ): Promise<Ageing | undefined> {
    const key = this.#keys.ofCell('ageing', cell, corpus);
    const known = await this.#take<Omit<Ageing, 'cellId'>>(key);
    if (known !== undefined) return { ...known, cellId: cell.id };
    const found = await this.#inner.ageing(cell, corpus, messageEnds, control);
    if (found !== undefined) {
      const { cellId: _, ...kept } = found;
      await this.#store.put(key, kept);
    }
    return found;
  }

  async damage(
    cell: Cell,
    corpus: CorpusData,
    plan: DamagePlan,
    control: Control,
  ): Promise<readonly CellDamage[] | CellFailure> {
    const key = this.#keys.ofCell(`damage ${JSON.stringify(plan)}`, cell, corpus);
    const known = await this.#take<readonly CellDamage[]>(key);
    if (known !== undefined) return known;
    const found = await this.#inner.damage(cell, corpus, plan, control);
    if (!('failure' in found)) await this.#store.put(key, found);
    return found;
  }

  close(): Promise<void> {
    return this.#inner.close();
  }

  async #take<T extends object>(key: string): Promise<T | undefined> {
    if (this.#fresh) return undefined;
    const found = await this.#store.get(key);
    return typeof found === 'object' && found !== null ? (found as T) : undefined;
  }
}
