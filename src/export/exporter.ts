import type { Candidate } from '../coders/candidate.ts';
import type { Setup } from '../coders/contract.ts';
import type { PrintContext } from './print-c.ts';

/** An encoder and a decoder of one message as programs with their tables, before they are printed in a language. */
export interface ExportedCoder {
  /** Entry `encode_message`. */
  readonly encoder: PrintContext;
  /** Entry `decode_message`. */
  readonly decoder: PrintContext;
  /** Most bits that one symbol takes. */
  readonly longestSymbolBits: number;
  /** Most bits of a message beside symbols and count. */
  readonly endingBits: number;
  /** What becomes of symbols that the tables were not trained on, in a sentence. */
  readonly unseen: string;
}

/**
 * Makes the programs of one coder.
 * @param setup  policy `shipped`, with tables, or `none`
 */
export type Exporter = (candidate: Candidate, setup: Setup) => ExportedCoder;

/** Bytes of an element that holds 0 … greatest. */
export function elementBytesFor(greatest: number): 1 | 2 | 4 {
  if (greatest < 2 ** 8) return 1;
  return greatest < 2 ** 16 ? 2 : 4;
}

/** The buffers of both ends: bytes, and symbols as wide as the alphabet needs. */
export function messageBuffers(alphabetSize: number): {
  encoder: PrintContext['buffers'];
  decoder: PrintContext['buffers'];
} {
  const symbols = { name: 'symbols', elementBytes: elementBytesFor(alphabetSize - 1) };
  return {
    encoder: [symbols, { name: 'out', elementBytes: 1 }],
    decoder: [{ name: 'in', elementBytes: 1 }, symbols],
  };
}
