import { CorruptStreamError } from '../errors/errors.ts';
import { PrefixDecoder } from '../stages/prefix-decoder.ts';
import { PrefixTable } from '../stages/prefix-table.ts';
import { newSymbolArray } from '../symbols/sequence.ts';
import type { DecodeLimits, Setup } from './contract.ts';
import { SymbolCounts } from './huffman-counts.ts';
import { empiricalBits, empiricalCosts, smoothedCosts } from './huffman-price.ts';
import { huffmanTables } from './huffman-tables.ts';
import type { DecodedTaker, PiecesInput, Pricer } from './in-pieces.ts';
import type { Rational } from './parameters.ts';
import { PiecesWalk } from './pieces-walk.ts';
import { PricedMessages } from './priced-messages.ts';

/** Most symbols decoded at once; none takes more than four bytes. */
const BLOCK_SYMBOLS = 2 ** 14;

/**
 * Decodes words from a source that is read in pieces.
 * @param shipped  absent: the table is found in the message, or in the first that has symbols
 */
export function* decodeWordsInPieces(
  input: PiecesInput,
  setup: Setup,
  limits: DecodeLimits,
  taker: DecodedTaker,
  maxBits: number,
  shipped: PrefixDecoder | undefined,
): Generator<undefined, number, undefined> {
  const walk = new PiecesWalk(setup, input, limits);
  const { window } = walk;
  const table = new PrefixTable();
  const words = shipped ?? new PrefixDecoder(setup.alphabetSize);
  const each = setup.reset === 'message';
  const halfWindow = Math.floor(window.bytes.length / 2);
  const blockSymbols = Math.min(BLOCK_SYMBOLS, Math.floor(halfWindow / 4) - 4);
  const symbols = newSymbolArray(setup.alphabetSize, blockSymbols);
  let known = shipped !== undefined;
  for (let count = walk.next(); count >= 0; count = walk.next()) {
    if (count > 0 && !known) {
      known = !each;
      const most = each ? count : limits.maxSymbols;
      window.ensure(halfWindow);
      table.read(window, setup.alphabetSize, maxBits, most);
      words.setWords(table.symbols, table.lengths, table.count, most);
    }
    if (count * words.shortestWordBits > window.bitsLeft) {
      throw new CorruptStreamError('a message says it holds more symbols than its bits can', {
        bitOffset: window.sourcePosition,
        got: `${count} symbols of ${words.shortestWordBits} bits or more`,
      });
    }
    for (let left = count; left > 0; ) {
      const block = Math.min(left, blockSymbols);
      window.ensure(4 * block + 16);
      words.decode(window, symbols, 0, block);
      taker.take(symbols, 0, block);
      yield;
      left -= block;
    }
    walk.close(window.sourcePosition);
    taker.end();
  }
  return window.sourcePosition;
}

/** The prices of `priceHuffman`, chunk by chunk. */
export function huffmanPricer(setup: Setup, added: Rational): Pricer {
  if (setup.policy === 'sent' && setup.reset === 'message') {
    const counts = new SymbolCounts(setup.alphabetSize);
    return new PricedMessages(0, {
      begin: () => counts.clear(),
      add: (symbols, from, to) => counts.add(symbols, from, to),
      takeBits: () => empiricalBits(counts),
    });
  }
  const { counts } = huffmanTables(setup);
  const costs = setup.policy === 'shipped' ? smoothedCosts(counts, added) : empiricalCosts(counts);
  let bits = 0;
  return new PricedMessages(0, {
    begin() {
      bits = 0;
    },
    add(symbols, from, to) {
      let sum = bits;
      for (let i = from; i < to; i++) sum += costs[symbols[i]];
      bits = sum;
    },
    takeBits: () => bits,
  });
}
