import type { CodedTotals, FloorShare } from '../account/bit-account.ts';
import type { FitClass } from '../coders/contract.ts';
import { equalLengthsCeiling, type NoCeiling } from '../entropy/ceilings.ts';
import { type EntropyByOrder, entropyByOrder } from '../entropy/entropy-by-order.ts';
import { blockEstimable } from '../entropy/estimable.ts';
import { type Ceiling, type Floor, floorOf, openingBits } from '../entropy/floor.ts';
import { type MatchLengthEntropy, matchLengthEntropy } from '../entropy/match-lengths.ts';
import { type MatchMeasurements, measureMatches } from '../entropy/match-measurements.ts';
import type { ContextScope } from '../models/context-counts.ts';
import { type Cell, decodesAlone } from './cells.ts';
import type { CorpusShape } from './corpus-data.ts';
import { matchRecord, orderRecord } from './entropy-record.ts';
import { ceilingsOf, runCeilings, symbolsOf } from './floor-ceilings.ts';
import { FloorPieces } from './floor-pieces.ts';
import type { CellBits, CellFailure } from './run-cell.ts';
import type { EntropyRecord } from './run-record.ts';
import { codedKeyOf } from './variation.ts';

/** Entropies are counted at least up to this order, and no further than the second. */
const LEAST_ORDER = 4;
const MOST_ORDER = 6;
/** Beside cells, context-tree weighting is run only on so many symbols: it takes about 15 µs for each. */
const MOST_CTW_SYMBOLS = 2 ** 18;

interface ScopedFloor {
  readonly entropy: EntropyByOrder;
  /** Absent where the adaptive coders were not run either: both look at every symbol many times. */
  readonly matches?: MatchLengthEntropy;
  readonly floor: Floor;
  readonly openingBits: number;
}

/**
 * Contexts of a cell as an estimator must count them to be comparable. Under fill each cell cuts messages of its own, so all
 * are held against contexts that run on over units, and the opening of messages is theirs to pay.
 */
export function scopeOf(cell: Cell, corpus: CorpusShape): ContextScope {
  if (corpus.fill !== undefined) return 'running';
  return decodesAlone(cell) || corpus.test.messageEnds.length <= 1 ? 'message' : 'running';
}

export interface FloorOptions {
  readonly scopes: Iterable<ContextScope>;
  readonly upto: number;
  readonly useful: boolean;
  /** Already known ceilings. */
  readonly ceilings: readonly Ceiling[];
  readonly run: boolean;
  /** Also context-tree weighting, which takes some seconds and 400 MB. */
  readonly ctw?: boolean;
  /** Also the estimators that are not the usual one. */
  readonly all?: boolean;
  /** The source is known to change along the data. */
  readonly changes?: boolean;
}

/** The index one past each file's last symbol. */
export function fileEndsOf({ test, testFiles }: CorpusShape): Uint32Array {
  return Uint32Array.from(testFiles, ({ messageEnd }) =>
    messageEnd === 0 ? 0 : test.messageEnds[messageEnd - 1],
  );
}

/** Entropies and floors of one corpus, one for each kind of contexts that its cells have. */
export class CorpusFloors {
  readonly #corpus: CorpusShape;
  readonly #counted: ReadonlyMap<ContextScope, EntropyByOrder>;
  readonly #byScope = new Map<ContextScope, ScopedFloor>();
  #ceilings: readonly Ceiling[] = [];
  readonly #without: NoCeiling[] = [];
  readonly #pieces: FloorPieces;

  /**
   * @param counted  entropies that are there already; needed where the symbols are not
   * @param pieces   what is there already, or is computed here
   */
  constructor(
    corpus: CorpusShape,
    counted: ReadonlyMap<ContextScope, EntropyByOrder> = new Map(),
    pieces = new FloorPieces(),
  ) {
    this.#corpus = corpus;
    this.#counted = counted;
    this.#pieces = pieces;
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
    await this.build(this.optionsForCells(results, run), pause);
  }

  /** What {@link buildForCells} builds. */
  optionsForCells(results: readonly (CellBits | CellFailure)[], run: boolean): FloorOptions {
    const scopes = new Set(results.map((r) => scopeOf(r.cell, this.#corpus)));
    let upto = LEAST_ORDER;
    for (const result of results) {
      if (!('failure' in result) && result.fitOf !== undefined && 'order' in result.fitOf) {
        upto = Math.max(upto, Math.min(MOST_ORDER, result.fitOf.order));
      }
    }
    const ceilings = [...ceilingsOf(results, this.#corpus)];
    const { test, vary } = this.#corpus;
    // Other messages of the same source: the plan's own have it.
    const again = vary?.messageSymbols !== undefined;
    const ctw = run && !again && test.symbols.length <= MOST_CTW_SYMBOLS;
    return { scopes, upto, useful: false, ceilings, run, ctw };
  }

  /**
   * The same without cells: for an entropy report.
   * @param options.run  also run the adaptive coders that always stand among the ceilings
   */
  async build(options: FloorOptions, pause: () => Promise<void>): Promise<void> {
    const { test } = this.#corpus;
    if (test.symbols.length === 0) return;
    const ceilings = [equalLengthsCeiling(test.alphabetSize), ...options.ceilings];
    if (options.run) {
      const ctw = options.ctw === true;
      this.#without.push(...(await runCeilings(test, ceilings, this.#pieces, ctw, pause)));
    }
    this.#ceilings = ceilings;
    let measured: MatchMeasurements | undefined;
    for (const contexts of options.scopes) {
      await pause();
      const { upto, useful, all = false, changes = false } = options;
      const sampled = this.#corpus.sample !== undefined;
      const entropy =
        this.#counted.get(contexts) ??
        this.#pieces.take(
          `entropy ${JSON.stringify({ contexts, upto, useful, all, changes, sampled })}`,
          () =>
            entropyByOrder(symbolsOf(test), {
              upto,
              contexts,
              useful,
              all,
              changes,
              fileEnds: fileEndsOf(this.#corpus),
              sampled,
            }),
        );
      let matches: MatchLengthEntropy | undefined;
      if (options.run) {
        await pause();
        const order = entropy.largestEstimable;
        matches = this.#pieces.take(`matches ${contexts} of order ${order}`, () => {
          if (measured?.order !== order) measured = measureMatches(symbolsOf(test), order);
          return matchLengthEntropy(symbolsOf(test), entropy, measured);
        });
      }
      const floor = floorOf({ orders: entropy.orders, ceilings, matches });
      this.#byScope.set(contexts, {
        entropy,
        ...(matches === undefined ? {} : { matches }),
        floor,
        openingBits: openingBits(test, entropy.orders, floor.order, contexts),
      });
    }
  }

  /** What was counted for one kind of contexts. */
  entropyOf(contexts: ContextScope): EntropyByOrder | undefined {
    return this.#byScope.get(contexts)?.entropy;
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
    const { name, vary } = this.#corpus;
    const data = codedKeyOf(name, vary ?? {});
    return [...this.#byScope].map(([contexts, { entropy, floor, matches }]) => ({
      corpus: name,
      ...(data === name ? {} : { data }),
      contexts,
      orders: entropy.orders.map(orderRecord),
      floor: { ...floor },
      ...(matches === undefined ? {} : { match_length: matchRecord(matches) }),
      ceilings: this.#ceilings.map(({ name, bitsPerSymbol }) => ({ name, rate: bitsPerSymbol })),
      ...(this.#without.length === 0
        ? {}
        : { no_ceilings: this.#without.map(({ name, reason }) => ({ name, reason })) }),
    }));
  }
}
