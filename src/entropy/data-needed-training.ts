import { parseCandidate } from '../coders/candidate.ts';
import type { Coder } from '../coders/contract.ts';
import type { ContextScope } from '../models/context-counts.ts';
import { ratioStandardError } from '../statistics/ratio-error.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import { cutIntoBlocks, heldOutBits, totalOf } from './held-out.ts';

/** Shares of the train part, least first. */
const SHARES = [0.01, 0.03, 0.1, 0.3, 1];
/** Blocks of the priced part, for standard errors. */
const BLOCKS = 64;
/** Fewest symbols of a training part; smaller shares are left out. */
const FEWEST_TRAINED = 16;
/** More is not trained on or priced, so that the question costs seconds and not minutes. */
const MOST_TRAINED = 2 ** 22;
const MOST_PRICED = 2 ** 20;

/** Savings below this, in bits per symbol, help nobody, however surely they are seen. */
const LEAST_HELP = 0.001;

/** Data in time order: what comes before, and what is coded. */
export interface TimedParts {
  readonly train: SymbolSequence;
  readonly test: SymbolSequence;
}

/** The parts themselves, or both halves of `all`. */
export function timedParts(all: SymbolSequence, train: SymbolSequence | undefined): TimedParts {
  if (train !== undefined) return { train, test: all };
  const { length } = all.symbols;
  const middle = Math.floor(length / 2);
  return {
    train: cutIntoBlocks(all, 0, middle, 1, 'message').sequence,
    test: cutIntoBlocks(all, middle, length, 1, 'message').sequence,
  };
}

export interface HeldOutOptions {
  readonly order: number;
  readonly contexts: ContextScope;
  /** The coder; back-off `arith` of that order when absent. */
  readonly coder?: Coder;
}

/** What tables trained on the last `trainSymbols` symbols before the priced part reach on it. */
export interface TrainingSize {
  readonly trainSymbols: number;
  /** Ideal bits per symbol. */
  readonly rate: number;
  /** Against the next smaller size: bits per symbol saved, and the standard error of that. Absent for the first. */
  readonly saving?: { readonly rate: number; readonly standardError: number };
}

export interface TrainingSizes {
  readonly order: number;
  readonly pricedSymbols: number;
  readonly sizes: readonly TrainingSize[];
  /** Least size from which no larger one saves more than its standard error and 1/1000 bit; absent where the largest does. */
  readonly enoughSymbols?: number;
}

/**
 * Rates of shipped tables by how much trained them: 1, 3, 10, 30 and 100 % of the train part, those nearest to what is coded.
 * @returns undefined where the parts are too small to say anything
 * Cost: training on 1.44 times the train part and five prices of the test part, both bounded.
 */
export function rateByTrainingSize(
  { train, test }: TimedParts,
  options: HeldOutOptions,
): TrainingSizes | undefined {
  const { order, contexts } = options;
  const coder = options.coder ?? backOff(order);
  const most = Math.min(MOST_TRAINED, train.symbols.length);
  const pricedSymbols = Math.min(MOST_PRICED, test.symbols.length);
  if (pricedSymbols < 2 * BLOCKS) return undefined;
  const part = cutIntoBlocks(test, 0, pricedSymbols, BLOCKS, contexts);
  const sizes: TrainingSize[] = [];
  let before: Float64Array | undefined;
  for (const share of SHARES) {
    const trainSymbols = Math.round(share * most);
    if (trainSymbols < FEWEST_TRAINED) continue;
    const bits = heldOutBits(coder, lastSymbols(train, trainSymbols, contexts), part);
    const rate = totalOf(bits) / pricedSymbols;
    if (before === undefined) sizes.push({ trainSymbols, rate });
    else {
      const saved = before.map((value, b) => value - bits[b]);
      const saving = {
        rate: totalOf(saved) / pricedSymbols,
        standardError: ratioStandardError(saved, part.blockSymbols)!,
      };
      sizes.push({ trainSymbols, rate, saving });
    }
    before = bits;
  }
  if (sizes.length < 2) return undefined;
  const lastHelp = sizes.findLastIndex(
    ({ saving }) =>
      saving !== undefined && saving.rate > Math.max(saving.standardError, LEAST_HELP),
  );
  const enough = Math.max(0, lastHelp);
  return {
    order,
    pricedSymbols,
    sizes,
    ...(lastHelp === sizes.length - 1 ? {} : { enoughSymbols: sizes[enough].trainSymbols }),
  };
}

/** What older training data cost. */
export interface TrainToTest {
  readonly order: number;
  readonly trainSymbols: number;
  readonly pricedSymbols: number;
  /** Bits per symbol that tables of the train part cost beyond tables of as many symbols just before the priced ones. */
  readonly excess: number;
  readonly standardError: number;
}

/**
 * The excess from train to test: the second half of the test part is priced by tables of the train part's end, and by tables
 * trained on as many symbols of the test part's first half. What both must learn alike cancels, so what is left is drift.
 * @returns undefined where the parts are too small to say anything
 * Cost: two trainings and two prices, bounded.
 */
export function trainToTest(
  { train, test }: TimedParts,
  options: HeldOutOptions,
): TrainToTest | undefined {
  const { order, contexts } = options;
  const coder = options.coder ?? backOff(order);
  const middle = Math.floor(test.symbols.length / 2);
  const end = Math.min(test.symbols.length, middle + MOST_PRICED);
  const trainSymbols = Math.min(MOST_TRAINED, train.symbols.length, middle);
  const pricedSymbols = end - middle;
  if (trainSymbols < FEWEST_TRAINED || pricedSymbols < 2 * BLOCKS) return undefined;
  const part = cutIntoBlocks(test, middle, end, BLOCKS, contexts);
  const old = heldOutBits(coder, lastSymbols(train, trainSymbols, contexts), part);
  const recent = cutIntoBlocks(test, middle - trainSymbols, middle, 1, contexts).sequence;
  const own = heldOutBits(coder, recent, part);
  const lost = old.map((value, b) => value - own[b]);
  return {
    order,
    trainSymbols,
    pricedSymbols,
    excess: totalOf(lost) / pricedSymbols,
    standardError: ratioStandardError(lost, part.blockSymbols)!,
  };
}

function lastSymbols(from: SymbolSequence, count: number, contexts: ContextScope): SymbolSequence {
  const { length } = from.symbols;
  return cutIntoBlocks(from, length - count, length, 1, contexts).sequence;
}

function backOff(order: number): Coder {
  return parseCandidate(`arith:order=${order}`).create();
}
