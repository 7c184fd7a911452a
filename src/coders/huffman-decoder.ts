import { BitReader } from '../bits/bit-reader.ts';
import { CorruptStreamError } from '../errors/errors.ts';
import { PrefixDecoder } from '../stages/prefix-decoder.ts';
import {
  MOST_SYMBOLS,
  PrefixMessageDecoder,
  SPARE_SYMBOLS,
} from '../stages/prefix-message-decoder.ts';
import { PrefixTable } from '../stages/prefix-table.ts';
import { newSymbolArray, type SymbolArray } from '../symbols/sequence.ts';
import type { CodedInput, Decoded, DecodeLimits, Decoder, Setup } from './contract.ts';
import { MessageWalk } from './message-frame.ts';
import { growSymbols } from './symbol-buffer.ts';

/** A decoder of shipped words. */
export function shippedReader(setup: Setup, limits: DecodeLimits, words: PrefixDecoder): Decoder {
  return { decode: (input) => decodeMessages(input, setup, limits, words, 'given', () => {}) };
}

/** A decoder that finds its table in the message, or in the first that has symbols. */
export function sentReader(setup: Setup, limits: DecodeLimits, maxBits: number): Decoder {
  const table = new PrefixTable();
  const words = new PrefixDecoder(setup.alphabetSize);
  const each = setup.reset === 'message';
  return {
    decode: (input) =>
      decodeMessages(
        input,
        setup,
        limits,
        words,
        each ? 'each' : 'first',
        (reader, symbolCount) => {
          // Each symbol that a table names is coded at least once.
          const most = each ? symbolCount : limits.maxSymbols;
          table.read(reader, setup.alphabetSize, maxBits, most);
          words.setWords(table.symbols, table.lengths, table.count, most);
        },
      ),
  };
}

/**
 * Walks the messages; `prepare` is called for each that has symbols, before its words, where a code
 * may have to be read first.
 */
function decodeMessages(
  input: CodedInput,
  setup: Setup,
  limits: DecodeLimits,
  words: PrefixDecoder,
  codes: 'given' | 'first' | 'each',
  prepare: (reader: BitReader, symbolCount: number) => void,
): Decoded {
  const reader = new BitReader(input.bytes);
  const walk = new MessageWalk(reader, setup, input, limits);
  let symbols = newSymbolArray(setup.alphabetSize, 0);
  let filled = 0;
  let known = codes === 'given';
  let many: ManyMessages | undefined;
  for (;;) {
    if (known && input.startOf === undefined) {
      many ??= new ManyMessages(input, setup, limits, words, walk);
      symbols = many.decode(reader, symbols, filled);
      filled = walk.symbolTotal;
    }
    const count = walk.next();
    if (count < 0) break;
    if (count > 0) {
      if (!known) {
        prepare(reader, count);
        known = codes === 'first';
      }
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

/** Symbols decoded before the whole is guessed by them. */
const GUESSED_FROM = 2 ** 16;

/** Takes short messages off a walk, many at once, as far as nothing about them is out of order. */
class ManyMessages {
  readonly #kernel: PrefixMessageDecoder | undefined;
  readonly #walk: MessageWalk;
  readonly #bits: number;
  readonly #maxSymbols: number;

  constructor(
    { bytes, symbolCounts, messageEndsBits }: CodedInput,
    { align, lengths, unitSymbols = 1 }: Setup,
    { maxSymbols }: DecodeLimits,
    { lookup }: PrefixDecoder,
    walk: MessageWalk,
  ) {
    this.#walk = walk;
    this.#bits = bytes.length * 8;
    this.#maxSymbols = maxSymbols;
    const messages = {
      bytes,
      align,
      unitSymbols,
      symbolCounts: lengths === 'known' ? symbolCounts : undefined,
      messageEndsBits: lengths === 'link' ? messageEndsBits : undefined,
      maxSymbols,
      symbolEnds: walk.messageEnds,
    };
    if (PrefixMessageDecoder.takes(messages, lookup))
      this.#kernel = new PrefixMessageDecoder(messages, lookup);
  }

  /** Returns the symbols, or a longer copy. */
  decode(reader: BitReader, symbols: SymbolArray, filled: number): SymbolArray {
    const kernel = this.#kernel;
    if (kernel === undefined || !(symbols instanceof Uint8Array)) return symbols;
    kernel.index = this.#walk.index;
    kernel.positionBits = reader.position;
    kernel.filled = filled;
    let out = symbols;
    kernel.run(out);
    while (kernel.needsRoom) {
      out = this.#grown(out, kernel);
      kernel.run(out);
    }
    reader.seek(kernel.positionBits);
    this.#walk.passTo(kernel.index, kernel.filled);
    return out;
  }

  #grown(symbols: Uint8Array, { filled, positionBits }: PrefixMessageDecoder): Uint8Array {
    const guess =
      filled < GUESSED_FROM ? 0 : Math.ceil((filled / positionBits) * this.#bits * 1.01) - filled;
    const most = this.#maxSymbols - filled + SPARE_SYMBOLS;
    const more = Math.max(guess, MOST_SYMBOLS + SPARE_SYMBOLS);
    return growSymbols(symbols, 256, filled, Math.min(more, most)) as Uint8Array;
  }
}
