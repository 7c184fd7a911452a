import { BitReader } from '../bits/bit-reader.ts';
import { BitWriter } from '../bits/bit-writer.ts';
import { LimitError, PromiseError } from '../errors/errors.ts';
import { CtwModel } from '../models/ctw.ts';
import { BinaryDecoder } from '../stages/binary-decoder.ts';
import { BinaryEncoder } from '../stages/binary-encoder.ts';
import { newSymbolArray, type SymbolSequence } from '../symbols/sequence.ts';
import type { Ceiling } from './floor.ts';

/** Bits of the past that a context spans, and its longest in symbols. */
const CONTEXT_BITS = 48;
const LONGEST_CONTEXT = 16;
/** Most nodes visited at one end: some ten seconds of work for both. */
const MOST_VISITS = 2 ** 26;

/** Longest context of the ceiling, in symbols: 48 for bytes divided by their width gives 6, bits have 16. */
export function ctwDepth(alphabetSize: number): number {
  return Math.min(LONGEST_CONTEXT, Math.max(2, Math.floor(CONTEXT_BITS / bitWidth(alphabetSize))));
}

/** The ceiling's name, with its depth. */
export function ctwName(alphabetSize: number): string {
  return `ctw:depth=${ctwDepth(alphabetSize)}`;
}

function bitWidth(alphabetSize: number): number {
  return Math.max(1, 32 - Math.clz32(alphabetSize - 1));
}

/**
 * The rate that context-tree weighting reaches on the whole sequence, learning from nothing, as the payload of a binary
 * stage whose decode gave back the input.
 * @throws LimitError where it would take longer than some tens of seconds; PromiseError where the decode differs
 * Cost: ⌈log2 m⌉ · (depth + 1) nodes a symbol at either end, at most 2^26; 384 MiB at most.
 */
export function ctwCeiling({ alphabetSize, symbols }: SymbolSequence): Ceiling {
  const depth = ctwDepth(alphabetSize);
  const name = ctwName(alphabetSize);
  const visits = symbols.length * bitWidth(alphabetSize) * (depth + 1);
  if (visits > MOST_VISITS) {
    const most = Math.floor(MOST_VISITS / (bitWidth(alphabetSize) * (depth + 1)));
    throw new LimitError('context-tree weighting would take too long on these data', {
      coder: name,
      expected: `at most ${most} symbols`,
      got: `${symbols.length} symbols`,
    });
  }
  const writer = new BitWriter();
  const stage = new BinaryEncoder(writer);
  stage.begin();
  encodeAll(symbols, alphabetSize, depth, stage);
  stage.end('zeros');
  const reader = new BitReader(writer.finish().bytes);
  const source = new BinaryDecoder(reader);
  source.begin();
  const decoded = newSymbolArray(alphabetSize, symbols.length);
  new CtwModel(alphabetSize, depth).decode(source, decoded, 0, decoded.length);
  for (let i = 0; i < symbols.length; i++) {
    if (decoded[i] === symbols[i]) continue;
    throw new PromiseError('the decoder gave back other symbols than were coded', {
      coder: name,
      symbolIndex: i,
    });
  }
  return { name, bitsPerSymbol: symbols.length === 0 ? 0 : stage.payloadBits / symbols.length };
}

// A function of its own, so that the encoder's model can be freed before the decoder's grows.
function encodeAll(
  symbols: SymbolSequence['symbols'],
  alphabetSize: number,
  depth: number,
  stage: BinaryEncoder,
): void {
  new CtwModel(alphabetSize, depth).encode(symbols, 0, symbols.length, stage);
}
