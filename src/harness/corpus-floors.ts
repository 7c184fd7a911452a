import type { CodedTotals, FloorShare } from '../account/bit-account.ts';
import type { FitClass } from '../coders/contract.ts';
import {
  adaptiveCeilings,
  CeilingStop,
  equalLengthsCeiling,
  type NoCeiling,
  noCeilingReason,
} from '../entropy/ceilings.ts';
import { ctwCeiling, ctwName } from '../entropy/ctw-ceiling.ts';
import { type EntropyByOrder, entropyByOrder } from '../entropy/entropy-by-order.ts';
import { blockEstimable } from '../entropy/estimable.ts';
import { type Ceiling, type Floor, floorOf, openingBits } from '../entropy/floor.ts';
import { type MatchLengthEntropy, matchLengthEntropy } from '../entropy/match-lengths.ts';
import { type MatchMeasurements, measureMatches } from '../entropy/match-measurements.ts';
import { BitassayError, BugError } from '../errors/errors.ts';
import type { ContextScope } from '../models/context-counts.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import { type Cell, decodesAlone } from './cells.ts';
import type { CorpusShape, SequenceShape } from './corpus-data.ts';
import { matchRecord, orderRecord } from './entropy-record.ts';
import { FloorPieces } from './floor-pieces.ts';
import type { CellBits, CellFailure } from './run-cell.ts';
import type { EntropyRecord } from './run-record.ts';
import { codedKeyOf, variationText } from './variation.ts';

/** Adaptive back-off coders of these orders always stand among the ceilings. */
const CEILING_ORDER = 4;
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

/**
 * What verified cells reach, in bits per symbol: ideal + tables + index, or all carried bits where a coder has no ideal. Any
 * code that can be decoded bounds the entropy rate from above, whatever its tables and resets. Named by candidate; only a
 * `learned` one that never resets takes the place of a ceiling run.
 */
function ceilingsOf(results: readonly (CellBits | CellFailure)[], corpus: CorpusShape): Ceiling[] {
  const { test } = corpus;
  const ceilings: Ceiling[] = [];
  for (const result of results) {
    if ('failure' in result) continue;
    const { cell, totals } = result;
    const neverResets = cell.reset === 'never' || test.messageEnds.length <= 1;
    const { idealBits, tableBits, indexBits, carriedBits } = totals;
    const bits = idealBits === undefined ? carriedBits : idealBits + tableBits + indexBits;
    const { policy, reset, candidate } = cell;
    const { align, trainShare } = cell.vary ?? {};
    const variation = variationText({
      ...(align === undefined ? {} : { align }),
      ...(trainShare === undefined ? {} : { trainShare }),
    });
    const name =
      policy === 'learned' && neverResets
        ? candidate.id + variation
        : `${candidate.id}@${policy}/${reset}${variation}`;
    ceilings.push({ name, bitsPerSymbol: bits / test.symbols.length });
  }
  return ceilings;
}

/** The index one past each file's last symbol. */
export function fileEndsOf({ test, testFiles }: CorpusShape): Uint32Array {
  return Uint32Array.from(testFiles, ({ messageEnd }) =>
    messageEnd === 0 ? 0 : test.messageEnds[messageEnd - 1],
  );
}

/** The same sequence, whose symbols must be at hand. */
function symbolsOf(sequence: SequenceShape): SymbolSequence {
  if (ArrayBuffer.isView(sequence.symbols)) return sequence as SymbolSequence;
  throw new BugError('symbols were needed that lie outside memory');
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
    if (options.run) await this.#runCeilings(ceilings, options.ctw === true, pause);
    this.#ceilings = ceilings;
    let measured: MatchMeasurements | undefined;
    for (const contexts of options.scopes) {
      await pause();
      const { upto, useful, all = false, changes = false } = options;
      const entropy =
        this.#counted.get(contexts) ??
        this.#pieces.take(
          `entropy ${JSON.stringify({ contexts, upto, useful, all, changes })}`,
          () =>
            entropyByOrder(symbolsOf(test), {
              upto,
              contexts,
              useful,
              all,
              changes,
              fileEnds: fileEndsOf(this.#corpus),
              sampled: this.#corpus.sample !== undefined,
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

  /** Adds what the coders that always stand among the ceilings reach; order by order, while they need less. */
  async #runCeilings(ceilings: Ceiling[], ctw: boolean, pause: () => Promise<void>): Promise<void> {
    const { test } = this.#corpus;
    const stop = new CeilingStop(Math.min(...ceilings.map((c) => c.bitsPerSymbol)));
    for (let order = 0; order <= CEILING_ORDER; order++) {
      const name = `arith:order=${order}`;
      let known = ceilings.find((c) => c.name === name);
      if (known === undefined && stop.reason !== undefined) {
        this.#without.push({ name, reason: stop.reason });
        continue;
      }
      if (known === undefined) {
        await pause();
        const run = this.#pieces.take(`ceiling ${name}`, () => {
          const { ceilings, without } = adaptiveCeilings(symbolsOf(test), {
            from: order,
            upto: order,
          });
          return { ceilings, without: without.map(({ name, reason }) => ({ name, reason })) };
        });
        known = run.ceilings.find((c) => c.name === name);
        if (known !== undefined) ceilings.push(known);
        this.#without.push(...run.without);
      }
      if (known !== undefined) stop.note(known);
    }
    if (!ctw) return;
    const name = ctwName(test.alphabetSize);
    const [equalLengths] = ceilings;
    if (ceilings.every((c) => c.bitsPerSymbol >= equalLengths.bitsPerSymbol)) {
      this.#without.push({ name, reason: 'not run: no other coder needs less than equal lengths' });
      return;
    }
    await pause();
    const found = this.#pieces.take(`ceiling ${name}`, (): Ceiling | NoCeiling => {
      try {
        return ctwCeiling(symbolsOf(test));
      } catch (error) {
        if (!(error instanceof BitassayError)) throw error;
        return { name, reason: noCeilingReason(error) };
      }
    });
    if ('reason' in found) this.#without.push(found);
    else ceilings.push(found);
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
