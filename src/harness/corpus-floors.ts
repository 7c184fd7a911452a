import type { CodedTotals, FloorShare } from '../account/bit-account.ts';
import type { FitClass } from '../coders/contract.ts';
import { symbolWidth } from '../coders/fixed.ts';
import { adaptiveCeilings } from '../entropy/ceilings.ts';
import { type EntropyByOrder, entropyByOrder } from '../entropy/entropy-by-order.ts';
import { blockEstimable } from '../entropy/estimable.ts';
import { type Ceiling, type Floor, floorOf, openingBits } from '../entropy/floor.ts';
import type { ContextScope } from '../models/context-counts.ts';
import { type Cell, decodesAlone } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import type { CellBits, CellFailure } from './run-cell.ts';
import type { EntropyRecord } from './run-record.ts';

/** Adaptive back-off coders of these orders always stand among the ceilings. */
const CEILING_ORDER = 4;
/** Entropies are counted at least up to this order, and no further than the second. */
const LEAST_ORDER = 4;
const MOST_ORDER = 6;

interface ScopedFloor {
  readonly entropy: EntropyByOrder;
  readonly floor: Floor;
  readonly openingBits: number;
}

/** Contexts of a cell as an estimator must count them to be comparable. */
export function scopeOf(cell: Cell, corpus: CorpusData): ContextScope {
  return decodesAlone(cell) || corpus.test.messageEnds.length <= 1 ? 'message' : 'running';
}

export interface FloorOptions {
  readonly scopes: Iterable<ContextScope>;
  readonly upto: number;
  readonly useful: boolean;
  /** Already known ceilings. */
  readonly ceilings: readonly Ceiling[];
  readonly run: boolean;
}

/**
 * What verified cells reach with contexts that never forget, in bits per symbol: ideal + tables + index, or all carried
 * bits where a coder has no ideal. Named by candidate; only a `learned` one takes the place of a ceiling run.
 */
function ceilingsOf(results: readonly (CellBits | CellFailure)[], corpus: CorpusData): Ceiling[] {
  const { test } = corpus;
  const ceilings: Ceiling[] = [];
  for (const result of results) {
    if ('failure' in result) continue;
    const { cell, totals } = result;
    const neverResets = cell.reset === 'never' || test.messageEnds.length <= 1;
    if (!neverResets || cell.policy === 'shipped') continue;
    const { idealBits, tableBits, indexBits, carriedBits } = totals;
    const bits = idealBits === undefined ? carriedBits : idealBits + tableBits + indexBits;
    const name =
      cell.policy === 'learned' ? cell.candidate.id : `${cell.candidate.id}@${cell.policy}`;
    ceilings.push({ name, bitsPerSymbol: bits / test.symbols.length });
  }
  return ceilings;
}

function equalLengthsCeiling(alphabetSize: number): Ceiling {
  return { name: 'fixed', bitsPerSymbol: symbolWidth(alphabetSize) };
}

/** Entropies and floors of one corpus, one for each kind of contexts that its cells have. */
export class CorpusFloors {
  readonly #corpus: CorpusData;
  readonly #byScope = new Map<ContextScope, ScopedFloor>();

  constructor(corpus: CorpusData) {
    this.#corpus = corpus;
  }

  /**
   * Counts entropies on the test part, gathers the ceilings and sets the floors, for the contexts that the cells have.
   * @param run    also run the adaptive coders that always stand among the ceilings
   * @param pause  awaited between steps; may throw to stop
   */
  async buildForCells(
    results: readonly (CellBits | CellFailure)[],
    run: boolean,
    pause: () => Promise<void>,
  ): Promise<void> {
    const scopes = new Set(results.map((r) => scopeOf(r.cell, this.#corpus)));
    let upto = LEAST_ORDER;
    for (const result of results) {
      if (!('failure' in result) && result.fitOf !== undefined && 'order' in result.fitOf) {
        upto = Math.max(upto, Math.min(MOST_ORDER, result.fitOf.order));
      }
    }
    const ceilings = [...ceilingsOf(results, this.#corpus)];
    await this.build({ scopes, upto, useful: false, ceilings, run }, pause);
  }

  /**
   * The same without cells: for an entropy report.
   * @param options.run  also run the adaptive coders that always stand among the ceilings
   */
  async build(options: FloorOptions, pause: () => Promise<void>): Promise<void> {
    const { test } = this.#corpus;
    if (test.symbols.length === 0) return;
    const ceilings = [equalLengthsCeiling(test.alphabetSize), ...options.ceilings];
    const known = new Set(ceilings.map((c) => c.name));
    for (let order = 0; options.run && order <= CEILING_ORDER; order++) {
      if (known.has(`arith:order=${order}`)) continue;
      await pause();
      ceilings.push(...adaptiveCeilings(test, { from: order, upto: order }).ceilings);
    }
    for (const contexts of options.scopes) {
      await pause();
      const entropy = entropyByOrder(test, {
        upto: options.upto,
        contexts,
        useful: options.useful,
      });
      const floor = floorOf({ orders: entropy.orders, ceilings });
      this.#byScope.set(contexts, {
        entropy,
        floor,
        openingBits: openingBits(test, entropy.orders, floor.order, contexts),
      });
    }
  }

  #scoped(cell: Cell): ScopedFloor | undefined {
    return this.#byScope.get(scopeOf(cell, this.#corpus));
  }

  /** The floor and the opening of a cell, in bits; zeros where there are no symbols. */
  shareOf(cell: Cell): FloorShare {
    const scoped = this.#scoped(cell);
    if (scoped === undefined) return { floorBits: 0, openingBits: 0 };
    return {
      floorBits: scoped.floor.point * this.#corpus.test.symbols.length,
      openingBits: scoped.openingBits,
    };
  }

  /** The cell's totals, without the fit where its class is not estimable on these symbols. */
  admit(bits: CellBits): CodedTotals {
    const { fitBits, ...rest } = bits.totals;
    if (fitBits === undefined || bits.fitOf === undefined) return rest;
    return this.#estimable(bits.cell, bits.fitOf) ? { ...rest, fitBits } : rest;
  }

  #estimable(cell: Cell, of: FitClass): boolean {
    const scoped = this.#scoped(cell);
    // Without symbols every fit is the empty sum, and exact.
    if (scoped === undefined) return true;
    if ('order' in of) return scoped.entropy.orders[of.order]?.estimable ?? false;
    return blockEstimable(of.blocks, of.distinct, of.entropyBits);
  }

  records(): EntropyRecord[] {
    return [...this.#byScope].map(([contexts, { entropy, floor }]) => ({
      corpus: this.#corpus.name,
      contexts,
      orders: entropy.orders.map((order) => ({
        k: order.k,
        plug_in: order.plugIn,
        corrected: order.corrected,
        low: order.low,
        high: order.high,
        positions: order.positions,
        contexts: order.contexts,
        pairs: order.pairs,
        estimable: order.estimable,
        ...(order.useful === undefined ? {} : { useful: order.useful }),
      })),
      floor: { ...floor },
    }));
  }
}
