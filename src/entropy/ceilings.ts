import { parseCandidate } from '../coders/candidate.ts';
import type { Coded, Coder, Decoded, Setup } from '../coders/contract.ts';
import { BitassayError, LimitError, PromiseError } from '../errors/errors.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Ceiling } from './floor.ts';

export interface CeilingsOptions {
  /** Lowest order of the adaptive coders; 0 when absent. */
  readonly from?: number;
  /** Highest order of the adaptive coders; 4 when absent. */
  readonly upto?: number;
  /** The coder of an order; back-off `arith` when absent. */
  readonly coderOf?: (order: number) => Coder;
  readonly progress?: (done: number, total: number) => void;
}

/** A coder that gave no ceiling, and why. */
export interface NoCeiling {
  readonly name: string;
  readonly error: BitassayError;
}

export interface Ceilings {
  readonly ceilings: readonly Ceiling[];
  readonly without: readonly NoCeiling[];
}

/** Largest sequence that is coded and decoded for its ceilings, in bytes of symbols: beside models it is held three times. */
export const LARGEST_CEILING_BYTES = 64 * 2 ** 20;

/**
 * Rates that adaptive coders of orders 0 … `upto` reach on the whole sequence, learning from nothing and never reset. Each
 * is encoded, decoded and compared; only then its payload + tables + index bits count.
 *
 * A coder that meets a limit, or fails, is listed and does not stop the others. An equal-length code is always among the
 * ceilings: it needs no run to be known.
 * @returns no ceilings for an empty sequence but the equal-length code's
 */
export function adaptiveCeilings(
  sequence: SymbolSequence,
  options: CeilingsOptions = {},
): Ceilings {
  const { from = 0, upto = 4, progress } = options;
  const coderOf = options.coderOf ?? ((order) => parseCandidate(nameOf(order)).create());
  const ceilings: Ceiling[] = [equalLengths(sequence.alphabetSize)];
  const without: NoCeiling[] = [];
  for (let order = from; order <= upto && sequence.symbols.length > 0; order++) {
    const name = nameOf(order);
    try {
      ceilings.push({ name, bitsPerSymbol: verifiedRate(coderOf(order), sequence) });
    } catch (error) {
      if (!(error instanceof BitassayError)) throw error;
      without.push({ name, error });
    }
    progress?.(order - from + 1, upto - from + 1);
  }
  return { ceilings, without };
}

const nameOf = (order: number): string => `arith:order=${order}`;

function equalLengths(alphabetSize: number): Ceiling {
  let width = 0;
  while (2 ** width < alphabetSize) width++;
  return { name: 'fixed', bitsPerSymbol: width };
}

/**
 * Payload, table and index bits per symbol, after the decode gave back the input. An arithmetic payload exceeds the ideal by
 * some bits per million symbols only, and needs no pass over the data of its own.
 */
function verifiedRate(coder: Coder, sequence: SymbolSequence): number {
  const setup: Setup = {
    policy: 'learned',
    alphabetSize: sequence.alphabetSize,
    reset: 'never',
    lengths: 'known',
    align: 8,
  };
  if (sequence.symbols.byteLength > LARGEST_CEILING_BYTES) {
    throw new LimitError('these data are too large to be coded for a ceiling', {
      expected: `at most ${LARGEST_CEILING_BYTES} bytes of symbols`,
      got: `${sequence.symbols.byteLength} bytes`,
      advice: 'Take a part of the data.',
    });
  }
  coder.check?.(setup);
  const coded = encode(coder, setup, sequence);
  verify(decode(coder, setup, coded, sequence), coder, sequence);
  const { tableBits, indexBits } = coded.account;
  return (coded.payloadBits + tableBits + indexBits) / sequence.symbols.length;
}

// Encoder and decoder each have a function of their own, so that the model of one can be freed before the next grows.
function encode(coder: Coder, setup: Setup, sequence: SymbolSequence): Coded {
  const encoder = coder.encoder(setup);
  encoder.push(sequence);
  return encoder.finish();
}

function decode(
  coder: Coder,
  setup: Setup,
  coded: Coded,
  { symbols, messageEnds }: SymbolSequence,
) {
  const symbolCounts = messageEnds.map((end, m) => end - (m === 0 ? 0 : messageEnds[m - 1]));
  return coder
    .decoder(setup, { maxSymbols: symbols.length })
    .decode({ bytes: coded.bytes, messageCount: messageEnds.length, symbolCounts });
}

function verify(decoded: Decoded, coder: Coder, { symbols, messageEnds }: SymbolSequence): void {
  const symbolIndex = firstDifference(decoded.sequence.symbols, symbols);
  if (symbolIndex >= 0) {
    throw new PromiseError('the decoder gave back other symbols than were coded', {
      coder: coder.declares.name,
      symbolIndex,
    });
  }
  const messageIndex = firstDifference(decoded.sequence.messageEnds, messageEnds);
  if (messageIndex >= 0) {
    throw new PromiseError('the decoder gave back other message ends than were coded', {
      coder: coder.declares.name,
      messageIndex,
    });
  }
}

/** Index of the first difference, −1 where there is none. */
function firstDifference(a: ArrayLike<number>, b: ArrayLike<number>): number {
  const length = Math.max(a.length, b.length);
  for (let i = 0; i < length; i++) if (a[i] !== b[i]) return i;
  return -1;
}
