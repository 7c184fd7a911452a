import { BugError } from '../errors/errors.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import type { Coded, Coder, Encoder, Setup } from './contract.ts';
import { refuseUnit, SymbolEnds, UnitGatherer } from './fill-units.ts';

/**
 * `coder` with encoders that fill messages: under `fill`, as many whole units as fit into the budget, one message after
 * another. Every candidate is wrapped so.
 *
 * A message is the longest before the first unit that does not fit: no message of fewer of these units overflows. Where a
 * message never becomes shorter by another unit, that is the most there can be.
 */
export function filling(coder: Coder): Coder {
  return {
    ...coder,
    encoder(setup) {
      if (setup.fill === undefined) return coder.encoder(setup);
      if (setup.reset !== 'message') {
        throw new BugError('messages cannot be filled where they do not decode alone', {
          coder: coder.declares.name,
          got: `reset ${setup.reset}`,
        });
      }
      return coder.filler?.(setup) ?? new TryingFiller(coder, setup);
    },
  };
}

/** Lengths of one message that are tried together at most. */
const MOST_TOGETHER = 64;

/**
 * Fills messages of any coder by coding them at several lengths. A message has the same bits alone as among others, so
 * each length is tried in a new encoder; what is kept goes to one encoder for all.
 *
 * Cost: 2 to about 6 codings of each message where sizes grow steadily; else one for each unit of it, each of all units before.
 */
export class TryingFiller implements Encoder {
  readonly #coder: Coder;
  readonly #setup: Setup;
  readonly #budgetBits: number;
  readonly #steady: boolean;
  readonly #encoder: Encoder;
  readonly #symbolEnds = new SymbolEnds();
  readonly #units: UnitGatherer;
  /** Units of the message before: the first guess. */
  #lastUnits = 1;

  /** @param setup  with `fill` */
  constructor(coder: Coder, setup: Setup) {
    const { fill, ...plain } = setup;
    this.#coder = coder;
    this.#setup = plain;
    this.#budgetBits = fill!.bytes * 8;
    this.#steady = coder.growsSteadily?.(plain) ?? false;
    this.#encoder = coder.encoder(plain);
    this.#units = new UnitGatherer((symbols, ends, last) => this.#code(symbols, ends, last));
  }

  push(chunk: Parameters<Encoder['push']>[0]): void {
    this.#units.push(chunk);
  }

  finish(): Coded {
    this.#units.finish();
    return { ...this.#encoder.finish(), symbolEnds: this.#symbolEnds.finish() };
  }

  #code(symbols: SymbolArray, unitEnds: Uint32Array, last: boolean): number {
    const messageEnds: number[] = [];
    let unit = 0;
    let from = 0;
    while (unit < unitEnds.length) {
      const bits = (units: readonly number[]) =>
        this.#bitsOf(
          symbols,
          from,
          units.map((count) => unitEnds[unit + count - 1]),
        );
      const available = unitEnds.length - unit;
      const units = this.#steady
        ? this.#mostBySteps(available, bits)
        : this.#mostInTurn(available, bits);
      if (units === available && !last) break;
      if (units === 0) {
        refuseUnit(this.#units.unitsDone + unit, bits([1])[0], this.#budgetBits);
      }
      this.#lastUnits = units;
      unit += units;
      from = unitEnds[unit - 1];
      messageEnds.push(from);
      this.#symbolEnds.add(this.#units.symbolsDone + from);
    }
    if (messageEnds.length > 0) {
      this.#encoder.push({
        alphabetSize: this.#setup.alphabetSize,
        symbols: symbols.subarray(0, from),
        messageEnds: Uint32Array.from(messageEnds),
      });
    }
    return unit;
  }

  /** Carried bits of the message from `from` to each of `ends`, each coded alone. */
  #bitsOf(symbols: SymbolArray, from: number, ends: readonly number[]): Float64Array {
    const { alphabetSize } = this.#setup;
    const encoder = this.#coder.encoder(this.#setup);
    for (const end of ends) {
      encoder.push({
        alphabetSize,
        symbols: symbols.subarray(from, end),
        messageEnds: Uint32Array.of(end - from),
      });
    }
    const { messageEndsBits } = encoder.finish();
    return messageEndsBits.map((end, i) => end - (i === 0 ? 0 : messageEndsBits[i - 1]));
  }

  /** Most units that fit: steps that double from the last message's number, then halving. */
  #mostBySteps(available: number, bits: (units: readonly number[]) => Float64Array): number {
    let fitting = 0;
    let over = available + 1;
    let probe = Math.min(this.#lastUnits, available);
    let step = 1;
    while (over - fitting > 1) {
      if (bits([probe])[0] <= this.#budgetBits) fitting = probe;
      else over = probe;
      if (over > available) probe = fitting + step;
      else if (fitting === 0) probe = over - step;
      else probe = (fitting + over) >>> 1;
      probe = Math.max(fitting + 1, Math.min(over - 1, probe));
      step *= 2;
    }
    return fitting;
  }

  /** Units before the first that does not fit, every number tried. */
  #mostInTurn(available: number, bits: (units: readonly number[]) => Float64Array): number {
    let fitting = 0;
    let together = Math.min(MOST_TOGETHER, this.#lastUnits + 1);
    while (fitting < available) {
      const count = Math.min(together, available - fitting);
      const sizes = bits(Array.from({ length: count }, (_, i) => fitting + 1 + i));
      const over = sizes.findIndex((size) => size > this.#budgetBits);
      if (over >= 0) return fitting + over;
      fitting += count;
      together = Math.min(MOST_TOGETHER, 1 + (fitting >>> 2));
    }
    return fitting;
  }
}
