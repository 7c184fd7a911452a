import { parseCandidate } from '../coders/candidate.ts';
import type { Coder } from '../coders/contract.ts';
import { BitassayError } from '../errors/errors.ts';
import type { ContextScope } from '../models/context-counts.ts';
import { ratioStandardError } from '../statistics/ratio-error.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import { cutIntoBlocks, heldOutBits, totalOf } from './held-out.ts';

/** Blocks of each half. */
const BLOCKS = 64;

/** What an order saves against the one below on data that did not train it. */
export interface HeldOutSaving {
  /** Bits per symbol; below 0 where it costs. */
  readonly rate: number;
  /** Of the paired difference, by blocks. */
  readonly standardError: number;
  /** Symbols of the half that was priced. */
  readonly symbols: number;
}

/** Whether one order saves bits that a coder can really have. */
export interface UsefulVerdict {
  /** Undefined: not tested. */
  readonly useful: boolean | undefined;
  /** What was found, or why nothing was tested; half a sentence. */
  readonly reason: string;
  /** Absent where not tested. */
  readonly saving?: HeldOutSaving;
}

export interface UsefulOptions {
  readonly upto: number;
  readonly contexts: ContextScope;
  /** Where contexts begin anew though they run on over messages: the index one past each stretch's last symbol. */
  readonly breaks?: Uint32Array;
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
  const { upto, contexts, breaks, progress } = options;
  const coderOf = options.coderOf ?? backOffCoder;
  const verdicts: UsefulVerdict[] = [];
  const stopWith = (reason: string): UsefulVerdict[] => {
    while (verdicts.length <= upto) verdicts.push({ useful: undefined, reason });
    return verdicts;
  };
  const { length } = sequence.symbols;
  if (length < 2 * BLOCKS) return stopWith('not tested: too few symbols for two halves of blocks');
  const middle = Math.floor(length / 2);
  const first = cutIntoBlocks(sequence, 0, middle, BLOCKS, contexts, breaks).sequence;
  const second = cutIntoBlocks(sequence, middle, length, BLOCKS, contexts, breaks);
  const { blockSymbols } = second;
  const symbols = length - middle;
  const perSymbol = Math.log2(sequence.alphabetSize);
  let before: Float64Array = blockSymbols.map((count) => count * perSymbol);
  let uselessInRow = 0;
  for (let order = 0; order <= upto; order++) {
    let bits: Float64Array;
    try {
      bits = heldOutBits(coderOf(order), first, second);
    } catch (error) {
      if (!(error instanceof BitassayError)) throw error;
      return stopWith(`not tested: order ${order} cannot be priced, ${error.message}`);
    }
    const saved = before.map((value, b) => value - bits[b]);
    const rate = totalOf(saved) / symbols;
    const error = ratioStandardError(saved, blockSymbols) ?? Number.POSITIVE_INFINITY;
    const useful = rate > error;
    verdicts.push({
      useful,
      reason: savingText(order, rate, error),
      saving: { rate, standardError: error, symbols },
    });
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
