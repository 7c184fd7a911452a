import { parseCandidate } from '../coders/candidate.ts';
import type { Coded, Coder, Decoded, Setup } from '../coders/contract.ts';
import { symbolWidth } from '../coders/fixed.ts';
import { compareDecoded, symbolCountsOf } from '../coders/verify.ts';
import { BitassayError, LimitError } from '../errors/errors.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Ceiling } from './floor.ts';

export interface CeilingsOptions {
  /** Lowest order of the adaptive coders; 0 when absent. */
  readonly from?: number;
  /** Highest order of the adaptive coders; 4 when absent. */
  readonly upto?: number;
  /** The coder of an order; back-off `arith` when absent. */
  readonly coderOf?: (order: number) => Coder;
  /** Bits per symbol that are reached already; those of an equal-length code when absent. */
  readonly best?: number;
  readonly progress?: (done: number, total: number) => void;
}

/** A coder that gave no ceiling, and why, as half a sentence. */
export interface NoCeiling {
  readonly name: string;
  readonly reason: string;
  /** What it met; absent where it was not run. */
  readonly error?: BitassayError;
}

/** Orders in a row that need more bits than the best rate reached, after which no higher one is run. */
const LOST_ORDERS = 2;

/**
 * Says when higher orders are not worth running: after two in a row that need more bits than the best so far. On data
 * without structure the higher ones take minutes and gigabytes to need more still.
 */
export class CeilingStop {
  #best: number;
  #lost: string[] = [];

  /** @param best  bits per symbol that are reached already */
  constructor(best: number) {
    this.#best = best;
  }

  note({ name, bitsPerSymbol }: Ceiling): void {
    if (bitsPerSymbol > this.#best) this.#lost.push(name);
    else this.#lost = [];
    this.#best = Math.min(this.#best, bitsPerSymbol);
  }

  /** Why nothing higher is to be run, as half a sentence; undefined: go on. */
  get reason(): string | undefined {
    if (this.#lost.length < LOST_ORDERS) return undefined;
    return `not run: ${this.#lost.slice(-LOST_ORDERS).join(' and ')} need more bits than what is reached already`;
  }
}

/** The half sentence for a coder that met an error. */
export function noCeilingReason(error: BitassayError): string {
  const { expected, got } = error.where;
  const bounds = expected === undefined || got === undefined ? '' : ` (${expected}; here ${got})`;
  return `${error.message}${bounds}`;
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
 * A coder that meets a limit, or fails, is listed and does not stop the others; {@link CeilingStop} does. An equal-length
 * code is always among the ceilings: it needs no run to be known.
 * @returns no ceilings for an empty sequence but the equal-length code's
 */
export function adaptiveCeilings(
  sequence: SymbolSequence,
  options: CeilingsOptions = {},
): Ceilings {
  const { from = 0, upto = 4, progress } = options;
  const coderOf = options.coderOf ?? ((order) => parseCandidate(nameOf(order)).create());
  const ceilings: Ceiling[] = [equalLengthsCeiling(sequence.alphabetSize)];
  const without: NoCeiling[] = [];
  const stop = new CeilingStop(options.best ?? ceilings[0].bitsPerSymbol);
  for (let order = from; order <= upto && sequence.symbols.length > 0; order++) {
    const name = nameOf(order);
    if (stop.reason !== undefined) {
      without.push({ name, reason: stop.reason });
      continue;
    }
    try {
      const ceiling = { name, bitsPerSymbol: verifiedRate(coderOf(order), sequence) };
      ceilings.push(ceiling);
      stop.note(ceiling);
    } catch (error) {
      if (!(error instanceof BitassayError)) throw error;
      without.push({ name, reason: noCeilingReason(error), error });
    }
    progress?.(order - from + 1, upto - from + 1);
  }
  return { ceilings, without };
}

const nameOf = (order: number): string => `arith:order=${order}`;

/** A code of equal lengths needs no run to be known. */
export function equalLengthsCeiling(alphabetSize: number): Ceiling {
  return { name: 'fixed', bitsPerSymbol: symbolWidth(alphabetSize) };
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
  compareDecoded(decode(coder, setup, coded, sequence), coded, sequence);
  const { tableBits, indexBits } = coded.account;
  return (coded.payloadBits + tableBits + indexBits) / sequence.symbols.length;
}

// Encoder and decoder each have a function of their own, so that the model of one can be freed before the next grows.
function encode(coder: Coder, setup: Setup, sequence: SymbolSequence): Coded {
  const encoder = coder.encoder(setup);
  encoder.push(sequence);
  return encoder.finish();
}

function decode(coder: Coder, setup: Setup, coded: Coded, sequence: SymbolSequence): Decoded {
  return coder.decoder(setup, { maxSymbols: sequence.symbols.length }).decode({
    bytes: coded.bytes,
    messageCount: sequence.messageEnds.length,
    symbolCounts: symbolCountsOf(sequence),
  });
}
