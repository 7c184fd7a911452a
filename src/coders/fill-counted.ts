import type { SymbolArray } from '../symbols/sequence.ts';
import type { Coded, Encoder, Setup } from './contract.ts';
import { refuseUnit, SymbolEnds, UnitGatherer } from './fill-units.ts';
import { symbolCountBits } from './message-frame.ts';

/** What knows the lengths of words. */
export interface WordCounter {
  /** Bits of the words of `symbols[from … to − 1]`. */
  bitsOf(symbols: SymbolArray, from: number, to: number): number;
}

/** More than any symbol count takes. */
const COUNT_BITS = 64;
/** Symbols after which decided messages go to the encoder; with fewer, counting and coding push out each other's tables. */
const HANDED_SYMBOLS = 2 ** 18;

/**
 * Fills messages of words whose lengths do not depend on their neighbours: bits are counted unit by unit, each once,
 * and whole messages handed to a plain encoder. Exact because sizes never fall.
 *
 * Cost: a plain encode, and one look-up for each symbol, or two.
 * @param encoder  of the same setup without `fill`
 */
export function countingFiller(setup: Setup, encoder: Encoder, words: WordCounter): Encoder {
  const filler = new CountingFiller(setup, encoder, words);
  return { push: (chunk) => filler.units.push(chunk), finish: () => filler.finish() };
}

class CountingFiller {
  readonly units: UnitGatherer;
  readonly #setup: Setup;
  readonly #encoder: Encoder;
  readonly #words: WordCounter;
  readonly #budgetBits: number;
  readonly #symbolEnds = new SymbolEnds();
  /** Ends of messages that are not handed on yet, from the first symbol of the first. */
  #ends = new Uint32Array(256);
  #endCount = 0;

  constructor(setup: Setup, encoder: Encoder, words: WordCounter) {
    this.#setup = setup;
    this.#encoder = encoder;
    this.#words = words;
    this.#budgetBits = Math.floor((setup.fill!.bytes * 8) / setup.align) * setup.align;
    this.units = new UnitGatherer((symbols, ends, last) => this.#make(symbols, ends, last));
  }

  finish(): Coded {
    this.units.finish();
    return { ...this.#encoder.finish(), symbolEnds: this.#symbolEnds.finish() };
  }

  #make(symbols: SymbolArray, unitEnds: Uint32Array, last: boolean): number {
    const words = this.#words;
    const surelyFits = this.#budgetBits - COUNT_BITS;
    let handed = 0;
    // The message at hand: first unit and symbol, bits of its words; `at` is the first symbol of the next unit.
    let first = 0;
    let from = 0;
    let at = 0;
    let bits = 0;
    for (let unit = 0; unit < unitEnds.length; unit++) {
      const to = unitEnds[unit];
      const unitBits = words.bitsOf(symbols, at, to);
      bits += unitBits;
      if (bits > surelyFits && !this.#fits(to - from, bits)) {
        if (unit > first) this.#end(at, handed);
        if (!this.#fits(to - at, unitBits)) this.#refuse(unit, to - at, unitBits);
        first = unit;
        from = at;
        bits = unitBits;
        if (from - handed >= HANDED_SYMBOLS) {
          this.#handOn(symbols, handed, from);
          handed = from;
        }
      }
      at = to;
    }
    if (last && first < unitEnds.length) {
      this.#end(at, handed);
      first = unitEnds.length;
      from = at;
    }
    if (this.#endCount > 0) this.#handOn(symbols, handed, from);
    return first;
  }

  #fits(symbolCount: number, bits: number): boolean {
    return symbolCountBits(this.#setup, symbolCount) + bits <= this.#budgetBits;
  }

  #end(end: number, handed: number): void {
    if (this.#endCount === this.#ends.length) {
      const grown = new Uint32Array(2 * this.#endCount);
      grown.set(this.#ends);
      this.#ends = grown;
    }
    this.#ends[this.#endCount++] = end - handed;
    this.#symbolEnds.add(this.units.symbolsDone + end);
  }

  #handOn(symbols: SymbolArray, from: number, to: number): void {
    this.#encoder.push({
      alphabetSize: this.#setup.alphabetSize,
      symbols: symbols.subarray(from, to),
      messageEnds: this.#ends.subarray(0, this.#endCount),
    });
    this.#endCount = 0;
  }

  #refuse(unit: number, symbolCount: number, unitBits: number): never {
    const { align, fill } = this.#setup;
    const bits = symbolCountBits(this.#setup, symbolCount) + unitBits;
    refuseUnit(this.units.unitsDone + unit, Math.ceil(bits / align) * align, fill!.bytes * 8);
  }
}
