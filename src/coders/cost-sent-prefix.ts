import { OperationTally } from '../models/counting-tally.ts';
import type { PrefixTable } from '../stages/prefix-table.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import { NgramCutter, NgramIndex, ngramSpace } from './block-huffman-ngrams.ts';
import { BlockFit } from './block-huffman-tables.ts';
import type { Setup } from './contract.ts';
import {
  atBothEnds,
  type BothEnds,
  type CodeEstimate,
  type EndCost,
  type EndOperations,
  endCost,
  integerBytes,
  mostOf,
} from './cost.ts';
import { BLOCK_CODE } from './cost-blocks.ts';
import { CountingBlocks } from './cost-blocks-operations.ts';
import {
  countingPrefix,
  PREFIX_CODE,
  PREFIX_STATE_BYTES,
  prefixTableBytes,
} from './cost-prefix.ts';
import { SymbolCounts } from './huffman-counts.ts';
import { HuffmanFit } from './huffman-tables.ts';

/** Count, sort, fit, write the table; read the table. A set of symbols is written and read by halves. */
const FIT_CODE: BothEnds<CodeEstimate> = {
  encoder: { statements: 130, nestedCalls: 2 },
  decoder: { statements: 70, nestedCalls: 2 },
};

/** Calls of a set written by halves, one within another. */
const halvings = (count: number): number => Math.ceil(Math.log2(count + 1));

function withFit(code: BothEnds<CodeEstimate>, words: number): BothEnds<CodeEstimate> {
  return atBothEnds(code, FIT_CODE, (own, fit) => ({
    statements: own.statements + fit.statements,
    nestedCalls: own.nestedCalls + fit.nestedCalls + halvings(words),
  }));
}

/**
 * Bytes that fitting and carrying a table of k words takes beside it, for entries counted to `greatestCount`.
 *
 * Encoder, for each word: two weights (its own and a merged one), its place in the order, a parent, a depth, and two places while
 * the table is written; where a word is as long as allowed, so that the limit may have been kept by packages, four lists of 2k
 * 32-bit integers, two of k, and a bit for each of 2k coins at each length. Decoder: a length and two places while it is read.
 */
function fitBytes(
  { count, lengths }: PrefixTable,
  maxBits: number,
  greatestCount: number,
): BothEnds<number> {
  const placeBytes = count === 0 ? 0 : integerBytes(count - 1);
  let longest = 0;
  for (let i = 0; i < count; i++) longest = Math.max(longest, lengths[i]);
  const packageBytes =
    longest === maxBits ? count * (4 * 8 + 2 * 4) + Math.ceil((2 * count) / 8) * maxBits : 0;
  return {
    encoder: count * (2 * integerBytes(greatestCount) + 4 * placeBytes + 1) + packageBytes,
    decoder: count * (1 + 2 * placeBytes),
  };
}

/** A code of single symbols: counts and words by symbol at the encoder, since any may occur; the words present at the decoder. */
function symbolBytes(
  table: PrefixTable,
  alphabetSize: number,
  maxBits: number,
  symbolCount: number,
): BothEnds<number> {
  const fit = fitBytes(table, maxBits, symbolCount);
  const words = prefixTableBytes(table, alphabetSize - 1);
  const wordBytes = table.count === 0 ? 0 : words.encoder / table.count;
  const countBytes = integerBytes(symbolCount);
  return {
    encoder:
      alphabetSize * (countBytes + wordBytes) +
      table.count * integerBytes(alphabetSize - 1) +
      fit.encoder,
    decoder: words.decoder + fit.decoder,
  };
}

/** Calls `take` with each message that has symbols, or with the whole unit: what one table is fitted to. */
function eachFitted(
  { messageEnds }: SymbolSequence,
  setup: Setup,
  take: (from: number, messageEnds: Uint32Array) => void,
): void {
  let from = 0;
  if (setup.reset === 'never') {
    const end = messageEnds.length === 0 ? 0 : messageEnds[messageEnds.length - 1];
    if (end > 0) take(0, messageEnds);
    return;
  }
  for (const to of messageEnds) {
    if (to > from) take(from, Uint32Array.of(to));
    from = to;
  }
}

const most = (costs: BothEnds<EndCost> | undefined, own: BothEnds<EndCost>): BothEnds<EndCost> =>
  costs === undefined ? own : atBothEnds(costs, own, mostOf);

function ramCosts(bytes: BothEnds<number>, code: BothEnds<CodeEstimate>): BothEnds<EndCost> {
  return {
    encoder: endCost(0, bytes.encoder, code.encoder),
    decoder: endCost(0, bytes.decoder, code.decoder),
  };
}

/** Fits `huffman` anew for each table that is sent. */
function eachSymbolFit(
  sequence: SymbolSequence,
  setup: Setup,
  maxBits: number,
  take: (table: PrefixTable, from: number, messageEnds: Uint32Array) => void,
): void {
  const counts = new SymbolCounts(sequence.alphabetSize);
  const fit = new HuffmanFit(maxBits);
  eachFitted(sequence, setup, (from, ends) => {
    counts.clear();
    counts.add(sequence.symbols, from, ends[ends.length - 1]);
    fit.fitSeen(counts);
    take(fit.table, from, ends);
  });
}

/** Costs of `huffman` where tables are sent, for the one that takes most: all of it in RAM. */
export function sentPrefixCosts(
  sequence: SymbolSequence,
  setup: Setup,
  maxBits: number,
): BothEnds<EndCost> | undefined {
  let costs: BothEnds<EndCost> | undefined;
  eachSymbolFit(sequence, setup, maxBits, (table, from, ends) => {
    const symbolCount = ends[ends.length - 1] - from;
    const bytes = symbolBytes(table, sequence.alphabetSize, maxBits, symbolCount);
    costs = most(
      costs,
      ramCosts(
        {
          encoder: PREFIX_STATE_BYTES + bytes.encoder,
          decoder: PREFIX_STATE_BYTES + bytes.decoder,
        },
        withFit(PREFIX_CODE, table.count),
      ),
    );
  });
  return costs;
}

/** Counts words with the table that is sent for them; what the tables take is not among them. */
export function sentPrefixOperations(
  sequence: SymbolSequence,
  setup: Setup,
  maxBits: number,
): EndOperations {
  const encoder = new OperationTally();
  const decoder = new OperationTally();
  eachSymbolFit(sequence, setup, maxBits, (table, from, ends) => {
    const counting = countingPrefix(table, sequence.alphabetSize, encoder, decoder);
    counting.code(sequence.symbols, from, ends[ends.length - 1]);
  });
  return { encoder: encoder.counts(), decoder: decoder.counts() };
}

/** Fits `block-huffman` anew for each pair of tables that are sent. */
function eachBlockFit(
  { symbols, alphabetSize, messageEnds }: SymbolSequence,
  setup: Setup,
  n: number,
  maxBits: number,
  take: (fit: BlockFit, from: number, messageEnds: Uint32Array) => void,
): void {
  const index = new NgramIndex(ngramSpace(alphabetSize, n));
  const tails = new SymbolCounts(alphabetSize);
  const fit = new BlockFit(maxBits);
  const cutter = new NgramCutter(n, alphabetSize, (keys, count) => {
    for (let i = 0; i < count; i++) index.add(keys[i]);
  });
  eachFitted({ symbols, alphabetSize, messageEnds }, setup, (first, ends) => {
    index.clear();
    tails.clear();
    let from = first;
    for (const to of ends) {
      cutter.take(symbols, from, to);
      tails.add(cutter.tail, 0, cutter.tailCount);
      cutter.tailCount = 0;
      from = to;
    }
    cutter.flush();
    fit.fitMessage(index, tails);
    take(fit, first, ends);
  });
}

/**
 * Costs of `block-huffman` where tables are sent, for the pair that takes most. Beside the fits: the encoder's blocks with their
 * counts and slots to find them, twice as many or more; the decoder's blocks.
 */
export function sentBlockCosts(
  sequence: SymbolSequence,
  setup: Setup,
  n: number,
  maxBits: number,
): BothEnds<EndCost> | undefined {
  const { alphabetSize } = sequence;
  let costs: BothEnds<EndCost> | undefined;
  eachBlockFit(sequence, setup, n, maxBits, ({ blocks, tail }, from, ends) => {
    const symbolCount = ends[ends.length - 1] - from;
    const { count } = blocks;
    const keyBytes = n * integerBytes(alphabetSize - 1);
    let slots = 2;
    while (slots < 2 * count) slots *= 2;
    const blockFit = fitBytes(blocks, maxBits, symbolCount);
    const words = prefixTableBytes(blocks, Math.max(0, count - 1));
    const last = symbolBytes(tail.table, alphabetSize, maxBits, symbolCount);
    const stateBytes = PREFIX_STATE_BYTES + keyBytes + 4;
    const bytes = {
      encoder:
        stateBytes +
        count * (keyBytes + integerBytes(symbolCount)) +
        slots * integerBytes(count) +
        blockFit.encoder +
        words.encoder +
        last.encoder,
      decoder: stateBytes + count * keyBytes + blockFit.decoder + words.decoder + last.decoder,
    };
    costs = most(costs, ramCosts(bytes, withFit(BLOCK_CODE, Math.max(count, tail.table.count))));
  });
  return costs;
}

/** As {@link sentPrefixOperations}. */
export function sentBlockOperations(
  sequence: SymbolSequence,
  setup: Setup,
  n: number,
  maxBits: number,
): EndOperations {
  const encoder = new OperationTally();
  const decoder = new OperationTally();
  eachBlockFit(sequence, setup, n, maxBits, (fit, first, ends) => {
    const counting = new CountingBlocks(fit, n, sequence.alphabetSize, encoder, decoder);
    let from = first;
    for (const to of ends) {
      counting.code(sequence.symbols, from, to);
      from = to;
    }
  });
  return { encoder: encoder.counts(), decoder: decoder.counts() };
}
