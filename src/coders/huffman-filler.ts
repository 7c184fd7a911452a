import { BitWriter } from '../bits/bit-writer.ts';
import { PrefixBitCounter } from '../stages/prefix-bit-counter.ts';
import type { PrefixEncoder } from '../stages/prefix-encoder.ts';
import { canFill, PrefixMessageFiller } from '../stages/prefix-message-filler.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import type { Coded, Encoder, Setup } from './contract.ts';
import { countingFiller } from './fill-counted.ts';
import { refuseUnit, SymbolEnds, UnitGatherer } from './fill-units.ts';
import { streamEncoder } from './huffman-encoder.ts';
import { symbolCountBits } from './message-frame.ts';
import { MessageLedger } from './message-ledger.ts';

/** Room made for bytes to come, as a multiple of what is likely. */
const ROOM = 1.06;

/** Fills messages with words that both ends know. Bytes go in one pass; other symbols are counted first. */
export function wordFiller(setup: Setup, words: PrefixEncoder): Encoder {
  const { fill, align, alphabetSize, lengths, unitSymbols = 1 } = setup;
  const room = {
    budgetBits: Math.floor((fill!.bytes * 8) / align) * align,
    align,
    unitSymbols: lengths === 'known' ? 0 : unitSymbols,
  };
  if (alphabetSize <= 256 && canFill(words, room)) {
    const filler = new WordFiller(setup, words, new PrefixMessageFiller(words, room));
    return { push: (chunk) => filler.units.push(chunk), finish: () => filler.finish() };
  }
  const { fill: _, ...plain } = setup;
  return countingFiller(
    setup,
    streamEncoder(plain, words, undefined, 0),
    new PrefixBitCounter(words),
  );
}

class WordFiller {
  readonly units: UnitGatherer;
  readonly #setup: Setup;
  readonly #words: PrefixEncoder;
  readonly #kernel: PrefixMessageFiller;
  readonly #writer: BitWriter;
  readonly #ledger: MessageLedger;
  readonly #symbolEnds = new SymbolEnds();

  constructor(setup: Setup, words: PrefixEncoder, kernel: PrefixMessageFiller) {
    this.#setup = setup;
    this.#words = words;
    this.#kernel = kernel;
    this.#writer = new BitWriter(1024, setup.sink);
    this.#ledger = new MessageLedger(setup.align);
    this.units = new UnitGatherer((symbols, ends, last) => this.#make(symbols, ends, last));
  }

  finish(): Coded {
    this.units.finish();
    return { ...this.#ledger.finish(this.#writer), symbolEnds: this.#symbolEnds.finish() };
  }

  #make(symbols: SymbolArray, unitEnds: Uint32Array, last: boolean): number {
    const bytes = symbols as Uint8Array;
    const kernel = this.#kernel;
    const ledger = this.#ledger;
    const units = unitEnds.length;
    let unit = 0;
    let at = 0;
    if (units > 0) this.#words.expect(unitEnds[units - 1]);
    while (unit < units) {
      const ends = ledger.roomForEnds(kernel.mostMessages(units - unit));
      const count = kernel.run(
        this.#writer,
        bytes,
        unitEnds,
        unit,
        at,
        last,
        ends,
        ledger.messageCount,
      );
      if (count === 0) break;
      const done = unitEnds[unit + kernel.unitCount - 1];
      if (unit === 0) this.#reserve(done, unitEnds[units - 1] - done);
      for (let i = 0; i < count; i++)
        this.#symbolEnds.add(this.units.symbolsDone + kernel.symbolEnds[i]);
      ledger.payloadBits += kernel.writtenBits;
      ledger.closeMany(this.#writer, count, kernel);
      unit += kernel.unitCount;
      at = done;
    }
    if (unit < units) this.#checkUnit(bytes, unitEnds, unit, at);
    return unit;
  }

  /**
   * Makes room at once for `left` symbols as the first run, of `done` symbols, coded its own: otherwise all bytes move at
   * each doubling, and leave garbage.
   */
  #reserve(done: number, left: number): void {
    if (this.#setup.sink !== undefined || done === 0) return;
    const { writtenBits, framingBits, paddingBits } = this.#kernel;
    const bytes = (writtenBits + framingBits + paddingBits) / 8;
    this.#writer.reserve(Math.ceil(Math.min(left, (ROOM * left * bytes) / done)));
  }

  /** Refuses the first unit of a message where that does not fit even alone. */
  #checkUnit(symbols: Uint8Array, unitEnds: Uint32Array, unit: number, from: number): void {
    const { align, fill } = this.#setup;
    const to = unitEnds[unit];
    const bits = symbolCountBits(this.#setup, to - from) + this.#words.bitsOf(symbols, from, to);
    const paddedBits = Math.ceil(bits / align) * align;
    if (paddedBits > fill!.bytes * 8)
      refuseUnit(this.units.unitsDone + unit, paddedBits, fill!.bytes * 8);
  }
}
