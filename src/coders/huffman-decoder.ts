import { BitReader } from '../bits/bit-reader.ts';
import { CorruptStreamError } from '../errors/errors.ts';
import { PrefixDecoder } from '../stages/prefix-decoder.ts';
import { PrefixTable } from '../stages/prefix-table.ts';
import { newSymbolArray } from '../symbols/sequence.ts';
import type { CodedInput, Decoded, DecodeLimits, Decoder, Setup } from './contract.ts';
import { MessageWalk } from './message-frame.ts';
import { growSymbols } from './symbol-buffer.ts';

/** A decoder of shipped words. */
export function shippedReader(setup: Setup, limits: DecodeLimits, words: PrefixDecoder): Decoder {
  return { decode: (input) => decodeMessages(input, setup, limits, words, () => {}) };
}

/** A decoder that finds its table in the message, or in the first that has symbols. */
export function sentReader(setup: Setup, limits: DecodeLimits, maxBits: number): Decoder {
  const table = new PrefixTable();
  const words = new PrefixDecoder(setup.alphabetSize);
  const each = setup.reset === 'message';
  return {
    decode(input) {
      let known = false;
      return decodeMessages(input, setup, limits, words, (reader, symbolCount) => {
        if (known) return;
        known = !each;
        // Each symbol that a table names is coded at least once.
        const most = each ? symbolCount : limits.maxSymbols;
        table.read(reader, setup.alphabetSize, maxBits, most);
        words.setWords(table.symbols, table.lengths, table.count, most);
      });
    },
  };
}

/** Walks the messages; `prepare` is called for each that has symbols, before its words. */
function decodeMessages(
  input: CodedInput,
  setup: Setup,
  limits: DecodeLimits,
  words: PrefixDecoder,
  prepare: (reader: BitReader, symbolCount: number) => void,
): Decoded {
  const reader = new BitReader(input.bytes);
  const walk = new MessageWalk(reader, setup, input, limits);
  let symbols = newSymbolArray(setup.alphabetSize, 0);
  let filled = 0;
  for (let count = walk.next(); count >= 0; count = walk.next()) {
    if (count > 0) {
      prepare(reader, count);
      if (count * words.shortestWordBits > reader.limit - reader.position) {
        throw new CorruptStreamError('a message says it holds more symbols than its bits can', {
          bitOffset: reader.position,
          got: `${count} symbols of ${words.shortestWordBits} bits or more`,
        });
      }
      symbols = growSymbols(symbols, setup.alphabetSize, filled, count);
      filled = words.decode(reader, symbols, filled, filled + count);
    }
    walk.close(reader.position);
  }
  return {
    sequence: {
      alphabetSize: setup.alphabetSize,
      symbols: symbols.subarray(0, filled),
      messageEnds: walk.messageEnds,
    },
    bitsConsumed: reader.position,
  };
}
