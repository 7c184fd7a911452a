import { parseCandidate } from '../coders/candidate.ts';
import type { Coder, Setup } from '../coders/contract.ts';
import { BitassayError } from '../errors/errors.ts';
import type { ContextScope } from '../models/context-counts.ts';
import { ratioStandardError } from '../statistics/ratio-error.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';

/** Blocks of each half. */
const BLOCKS = 64;

/** Whether one order saves bits that a coder can really have. */
export interface UsefulVerdict {
  /** Undefined: not tested. */
  readonly useful: boolean | undefined;
  /** What was found, or why nothing was tested; half a sentence. */
  readonly reason: string;
}

export interface UsefulOptions {
  readonly upto: number;
  readonly contexts: ContextScope;
  /** The coder of an order; back-off `arith` when absent. */
  readonly coderOf?: (order: number) => Coder;
  readonly progress?: (done: number, total: number) => void;
}

/**
 * Whether each order is useful: a model trained on the first half in time prices the second; order k is useful where that
 * falls from order k − 1 (for k = 0: from log2 m bits a symbol) by more than the standard error of the paired difference
 * over {@link BLOCKS} contiguous blocks.
 *
 * Testing stops after two useless orders in a row, and at an order that cannot be priced. Both halves are cut into blocks
 * that the model codes as messages, so that a block's first symbols have start contexts at every order alike; under
 * contexts `message`, messages end where they do as well.
 * @returns shape [upto + 1]
 * Cost: for each order tested, one training pass over a half and one pricing pass over the other.
 */
export function usefulOrders(sequence: SymbolSequence, options: UsefulOptions): UsefulVerdict[] {
  const { upto, contexts, progress } = options;
  const coderOf = options.coderOf ?? backOffCoder;
  const verdicts: UsefulVerdict[] = [];
  const stopWith = (reason: string): UsefulVerdict[] => {
    while (verdicts.length <= upto) verdicts.push({ useful: undefined, reason });
    return verdicts;
  };
  const halves = cutInHalves(sequence, contexts);
  if (halves === undefined) return stopWith('not tested: too few symbols for two halves of blocks');
  const { second, blockSymbols } = halves;
  const perSymbol = Math.log2(sequence.alphabetSize);
  let before: Float64Array = blockSymbols.map((symbols) => symbols * perSymbol);
  let uselessInRow = 0;
  for (let order = 0; order <= upto; order++) {
    let bits: Float64Array;
    try {
      bits = heldOutBits(coderOf(order), halves);
    } catch (error) {
      if (!(error instanceof BitassayError)) throw error;
      return stopWith(`not tested: order ${order} cannot be priced, ${error.message}`);
    }
    const saved = before.map((value, b) => value - bits[b]);
    const rate = total(saved) / second.symbols.length;
    const error = ratioStandardError(saved, blockSymbols) ?? Number.POSITIVE_INFINITY;
    const useful = rate > error;
    verdicts.push({ useful, reason: savingText(order, rate, error) });
    progress?.(order + 1, upto + 1);
    before = bits;
    uselessInRow = useful ? 0 : uselessInRow + 1;
    if (uselessInRow === 2) return stopWith('not tested: the two orders below are not useful');
  }
  return verdicts;
}

function savingText(order: number, rate: number, error: number): string {
  const from = order === 0 ? 'equal lengths' : `order ${order - 1}`;
  const change = `${Math.abs(rate).toFixed(4)} bits/symbol ${rate < 0 ? 'more' : 'less'}`;
  return `${change} than ${from} on held-out data, standard error ${error.toFixed(4)}`;
}

function backOffCoder(order: number): Coder {
  return parseCandidate(`arith:order=${order}`).create();
}

function total(values: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += values[i];
  return sum;
}

/** Both halves as messages, and which block each message of the second half belongs to. */
interface Halves {
  readonly first: SymbolSequence;
  readonly second: SymbolSequence;
  readonly blockOf: Uint32Array;
  /** Symbols of each block of the second half; all above 0. */
  readonly blockSymbols: Float64Array;
}

/** Undefined for fewer symbols than blocks. */
function cutInHalves(sequence: SymbolSequence, contexts: ContextScope): Halves | undefined {
  const { symbols, alphabetSize, messageEnds } = sequence;
  const { length } = symbols;
  if (length < 2 * BLOCKS) return undefined;
  const blockEnd = (block: number): number => Math.floor(((block + 1) * length) / (2 * BLOCKS));
  const middle = blockEnd(BLOCKS - 1);
  const pieces = contexts === 'message' ? messageEnds : new Uint32Array(0);
  const firstEnds: number[] = [];
  const secondEnds: number[] = [];
  const blockOf: number[] = [];
  const blockSymbols = new Float64Array(BLOCKS);
  let piece = 0;
  let from = 0;
  for (let block = 0; block < 2 * BLOCKS; block++) {
    const stop = blockEnd(block);
    while (from < stop) {
      while (piece < pieces.length && pieces[piece] <= from) piece++;
      const to = piece < pieces.length ? Math.min(stop, pieces[piece]) : stop;
      if (block < BLOCKS) firstEnds.push(to);
      else {
        secondEnds.push(to - middle);
        blockOf.push(block - BLOCKS);
        blockSymbols[block - BLOCKS] += to - from;
      }
      from = to;
    }
  }
  return {
    first: {
      alphabetSize,
      symbols: symbols.subarray(0, middle),
      messageEnds: Uint32Array.from(firstEnds),
    },
    second: {
      alphabetSize,
      symbols: symbols.subarray(middle),
      messageEnds: Uint32Array.from(secondEnds),
    },
    blockOf: Uint32Array.from(blockOf),
    blockSymbols,
  };
}

/** Ideal code length of each block of the second half, by a model that the first half trained. */
function heldOutBits(coder: Coder, halves: Halves): Float64Array {
  const setup: Setup = {
    policy: 'shipped',
    alphabetSize: halves.first.alphabetSize,
    reset: 'message',
    lengths: 'known',
    align: 1,
  };
  coder.check?.(setup);
  const trainer = coder.trainer!(setup);
  trainer.push(halves.first);
  const { messageIdealBits } = coder.price!(halves.second, { ...setup, tables: trainer.finish() });
  const bits = new Float64Array(BLOCKS);
  for (let m = 0; m < messageIdealBits.length; m++) bits[halves.blockOf[m]] += messageIdealBits[m];
  return bits;
}
