import type { BitWriter } from '../bits/bit-writer.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import type { Coded, Encoder, Setup } from './contract.ts';
import { refuseUnit, SymbolEnds, UnitGatherer } from './fill-units.ts';
import { symbolCountBits } from './message-frame.ts';
import type { MessageLedger } from './message-ledger.ts';

/**
 * One message at a time that can be taken back to a mark; its size never falls when symbols are added, unless it says so. What is in front of
 * its content, the count, is known only at its end.
 */
export interface MessageDraft {
  readonly writer: BitWriter;
  readonly ledger: MessageLedger;
  /** False: the size may fall. Absent: never. */
  readonly isSteady?: boolean;
  /** Begins a message; one that was not ended is forgotten. */
  start(): void;
  take(symbols: SymbolArray, from: number, to: number): void;
  /** Bits of the content, were the message to end here. */
  contentBits(): number;
  mark(): void;
  /** Back to the last mark of this message. Nothing can be taken before the next start. */
  restore(): void;
  /** Writes count and content, and books them. */
  end(symbolCount: number): void;
}

/** Share of the room left, by the size of the units before, that is filled at once when all goes well. */
const MOST_TRUST = 0.9;
const LEAST_TRUST = 0.2;

/**
 * Fills messages by taking unit after unit, with a mark after each; on overflow it goes back to the mark, ends the message
 * there and begins the next with the unit that did not fit. Exact because sizes never fall. Most of a message, guessed by
 * the size of the units before, is taken at once; where that was too much, the message begins again. Where sizes may fall,
 * every unit is taken by itself, up to the first that does not fit.
 *
 * Cost: a plain encode, and about one unit more for each message.
 */
export function fillingEncoder(setup: Setup, draft: MessageDraft): Encoder {
  const filler = new MessageFiller(setup, draft);
  return { push: (chunk) => filler.units.push(chunk), finish: () => filler.finish() };
}

class MessageFiller {
  readonly units: UnitGatherer;
  readonly #setup: Setup;
  readonly #draft: MessageDraft;
  readonly #budgetBits: number;
  readonly #symbolEnds = new SymbolEnds();
  /** Content bits of a unit, by the last message; at first no guess is made. */
  #unitBits = Number.POSITIVE_INFINITY;
  #trust = MOST_TRUST;

  // The message at hand: the first unit that it does not have yet, and where that begins.
  #next = 0;
  #at = 0;

  constructor(setup: Setup, draft: MessageDraft) {
    this.#setup = setup;
    this.#draft = draft;
    this.#budgetBits = Math.floor((setup.fill!.bytes * 8) / setup.align) * setup.align;
    this.units = new UnitGatherer((symbols, ends, last) => this.#make(symbols, ends, last));
  }

  finish(): Coded {
    this.units.finish();
    const { ledger, writer } = this.#draft;
    return { ...ledger.finish(writer), symbolEnds: this.#symbolEnds.finish() };
  }

  #make(symbols: SymbolArray, ends: Uint32Array, last: boolean): number {
    const draft = this.#draft;
    let unit = 0;
    let from = 0;
    while (unit < ends.length) {
      this.#next = unit;
      this.#at = from;
      draft.start();
      if (draft.isSteady !== false) this.#takeGuessed(symbols, ends, from);
      const isFull = this.#takeUntilOver(symbols, ends, from);
      const count = this.#next - unit;
      if (!isFull && !last) break;
      if (count === 0) this.#refuse(symbols, ends, unit, from);
      this.#unitBits = Math.max(1, draft.contentBits() / count);
      unit = this.#next;
      draft.end(this.#at - from);
      from = this.#at;
      this.#symbolEnds.add(this.units.symbolsDone + from);
    }
    return unit;
  }

  #fits(symbolCount: number, contentBits: number): boolean {
    return symbolCountBits(this.#setup, symbolCount) + contentBits <= this.#budgetBits;
  }

  /** Takes several units at once while there is likely room for them and one more. */
  #takeGuessed(symbols: SymbolArray, ends: Uint32Array, from: number): void {
    const draft = this.#draft;
    const unit = this.#next;
    for (;;) {
      const room = this.#budgetBits - draft.contentBits();
      const guess = Math.floor((this.#trust * room) / this.#unitBits);
      const next = this.#next + guess;
      if (guess < 2 || next > ends.length) return;
      const to = ends[next - 1];
      draft.take(symbols, this.#at, to);
      if (!this.#fits(to - from, draft.contentBits())) {
        this.#trust = Math.max(LEAST_TRUST, 0.75 * this.#trust);
        this.#next = unit;
        this.#at = from;
        draft.start();
        return;
      }
      this.#trust = Math.min(MOST_TRUST, 1.02 * this.#trust);
      draft.mark();
      this.#next = next;
      this.#at = to;
    }
  }

  /** Takes units one by one. True when one did not fit. */
  #takeUntilOver(symbols: SymbolArray, ends: Uint32Array, from: number): boolean {
    const draft = this.#draft;
    for (; this.#next < ends.length; this.#next++) {
      const to = ends[this.#next];
      draft.take(symbols, this.#at, to);
      if (!this.#fits(to - from, draft.contentBits())) {
        draft.restore();
        return true;
      }
      draft.mark();
      this.#at = to;
    }
    return false;
  }

  #refuse(symbols: SymbolArray, ends: Uint32Array, unit: number, from: number): never {
    const draft = this.#draft;
    const { align, fill } = this.#setup;
    draft.start();
    draft.take(symbols, from, ends[unit]);
    const bits = symbolCountBits(this.#setup, ends[unit] - from) + draft.contentBits();
    refuseUnit(this.units.unitsDone + unit, Math.ceil(bits / align) * align, fill!.bytes * 8);
  }
}
