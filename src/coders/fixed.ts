import { BitReader } from '../bits/bit-reader.ts';
import { BitWriter } from '../bits/bit-writer.ts';
import { CorruptStreamError } from '../errors/errors.ts';
import { PrefixDecoder } from '../stages/prefix-decoder.ts';
import { PrefixEncoder } from '../stages/prefix-encoder.ts';
import { newSymbolArray } from '../symbols/sequence.ts';
import type { Coder, CoderEntry, Declaration, Setup } from './contract.ts';
import { fixedCosts, fixedOperations } from './cost-fixed.ts';
import { countingFiller } from './fill-counted.ts';
import { MessageWalk, writeSymbolCount } from './message-frame.ts';
import { MessageLedger } from './message-ledger.ts';
import { MessagePieces } from './message-pieces.ts';
import { growSymbols } from './symbol-buffer.ts';

const declaration: Declaration = {
  name: 'fixed',
  summary: 'Every symbol in ⌈log2 m⌉ bits: what the product pays without an entropy coder.',
  parameters: [],
  policies: ['none'],
  resets: ['message'],
  needsWholeMessage: false,
  reference: false,
  maxAlphabetSize: 2 ** 32,
  worstCase: 'n · ⌈log2 m⌉ bits, always',
  memory: '5 bytes a symbol of the alphabet up to 65 536 symbols, none above',
  source: 'common practice, no source',
};

/** ⌈log2 m⌉ for m ≥ 1. */
export function symbolWidth(alphabetSize: number): number {
  let width = 0;
  while (2 ** width < alphabetSize) width++;
  return width;
}

/** Alphabets up to here go through the kernels of prefix codes, larger ones bit by bit. */
const KERNEL_ALPHABET = 2 ** 16;

/** Equal lengths make each canonical word the symbol itself. */
function equalWords(alphabetSize: number): { symbols: Uint32Array; lengths: Uint8Array } {
  return {
    symbols: Uint32Array.from({ length: alphabetSize }, (_, i) => i),
    lengths: new Uint8Array(alphabetSize).fill(symbolWidth(alphabetSize)),
  };
}

/** Writes the words of an alphabet that is not too large; undefined for one that is. */
function kernelOf({ alphabetSize }: Setup): PrefixEncoder | undefined {
  if (alphabetSize > KERNEL_ALPHABET) return undefined;
  const { symbols, lengths } = equalWords(alphabetSize);
  const kernel = new PrefixEncoder(alphabetSize);
  kernel.setWords(symbols, lengths, alphabetSize);
  return kernel;
}

/**
 * A code of equal lengths. One symbol only (m = 1): 0 bits a symbol, the count alone is carried.
 */
export const fixed: CoderEntry = { declaration, create: () => coder };

const coder: Coder = {
  declares: declaration,

  encoder(setup: Setup) {
    const width = symbolWidth(setup.alphabetSize);
    const writer = new BitWriter();
    const ledger = new MessageLedger(setup.align);
    const kernel = kernelOf(setup);
    const pieces = new MessagePieces({
      begin(symbolCount) {
        ledger.framingBits += writeSymbolCount(writer, setup, symbolCount);
      },
      take(symbols, from, to) {
        if (kernel !== undefined) kernel.encode(writer, symbols, from, to);
        else for (let i = from; i < to; i++) writer.writeBits(symbols[i], width);
        ledger.writtenBits += (to - from) * width;
        ledger.payloadBits += (to - from) * width;
      },
      end() {
        ledger.close(writer);
      },
    });
    return {
      push: (chunk) => pieces.push(chunk),
      finish: () => {
        pieces.finish();
        return ledger.finish(writer);
      },
    };
  },

  filler(setup) {
    const width = symbolWidth(setup.alphabetSize);
    const { fill: _, ...plain } = setup;
    return countingFiller(setup, coder.encoder(plain), {
      bitsOf: (_, from, to) => (to - from) * width,
    });
  },

  growsSteadily: () => true,

  decoder(setup, limits) {
    const width = symbolWidth(setup.alphabetSize);
    let kernel: PrefixDecoder | undefined;
    if (setup.alphabetSize <= KERNEL_ALPHABET) {
      const { symbols, lengths } = equalWords(setup.alphabetSize);
      kernel = new PrefixDecoder(setup.alphabetSize);
      kernel.setWords(symbols, lengths, setup.alphabetSize, Number.POSITIVE_INFINITY);
    }
    return {
      decode(input) {
        const reader = new BitReader(input.bytes);
        const walk = new MessageWalk(reader, setup, input, limits);
        let symbols = newSymbolArray(setup.alphabetSize, 0);
        let filled = 0;
        for (let count = walk.next(); count >= 0; count = walk.next()) {
          if (width > 0 && count * width > reader.limit - reader.position) {
            throw new CorruptStreamError('a message says it holds more symbols than its bits can', {
              bitOffset: reader.position,
              got: `${count} symbols of ${width} bits`,
            });
          }
          symbols = growSymbols(symbols, setup.alphabetSize, filled, count);
          if (kernel !== undefined) {
            filled = kernel.decode(reader, symbols, filled, filled + count);
            walk.close(reader.position);
            continue;
          }
          for (let i = 0; i < count; i++) {
            const symbol = reader.readBits(width);
            if (symbol >= setup.alphabetSize) {
              throw new CorruptStreamError('a decoded symbol is outside the alphabet', {
                bitOffset: reader.position,
                expected: `below ${setup.alphabetSize}`,
                got: String(symbol),
              });
            }
            symbols[filled++] = symbol;
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
      },
    };
  },

  costs: () => fixedCosts(),

  operations: (sequence) => fixedOperations(sequence),

  decoderHolds: (setup) => Math.ceil(symbolWidth(setup.alphabetSize) / 8),

  price(sequence, setup) {
    const width = symbolWidth(setup.alphabetSize);
    const bits = sequence.symbols.length * width;
    const messageIdealBits = new Float64Array(sequence.messageEnds.length);
    let from = 0;
    for (let i = 0; i < messageIdealBits.length; i++) {
      messageIdealBits[i] = (sequence.messageEnds[i] - from) * width;
      from = sequence.messageEnds[i];
    }
    return { idealBits: bits, messageIdealBits, fit: { bits, of: { order: 0 } } };
  },
};
