import { BitWriter } from '../bits/bit-writer.ts';
import { BugError } from '../errors/errors.ts';
import { newSymbolArray, type SymbolArray, type SymbolChunk } from '../symbols/sequence.ts';
import type { Coded, Coder, Encoder, Setup } from './contract.ts';
import { symbolWidth } from './fixed.ts';
import { symbolCountBits, writeSymbolCount } from './message-frame.ts';
import { MessageLedger } from './message-ledger.ts';
import { writeBitsOf } from './stored-bits.ts';
import { growSymbols } from './symbol-buffer.ts';

/** How the coder inside `stored=on` is set up: its bits end by themselves, and nothing is padded. */
export function innerSetup(setup: Setup): Setup {
  return { ...setup, lengths: 'known', align: 1 };
}

/**
 * Whether a message keeps the coder's bits: where raw symbols would make it no shorter, padding counted.
 * @param width       ⌈log2 m⌉
 * @param codedBits   of the message by the coder, without count and padding
 */
export function isCoded(
  setup: Setup,
  width: number,
  symbolCount: number,
  codedBits: number,
): boolean {
  const opening = 1 + symbolCountBits(setup, symbolCount);
  const { align } = setup;
  return (
    Math.ceil((opening + codedBits) / align) <= Math.ceil((opening + symbolCount * width) / align)
  );
}

/** Codes all messages, then takes for each the shorter of two forms. */
export class StoredEncoder implements Encoder {
  readonly #coder: Coder;
  readonly #setup: Setup;
  readonly #inner: Encoder;
  #symbols: SymbolArray;
  #symbolCount = 0;
  #ends = new Uint32Array(16);
  #messageCount = 0;

  constructor(coder: Coder, setup: Setup) {
    this.#coder = coder;
    this.#setup = setup;
    this.#inner = coder.encoder(innerSetup(setup));
    this.#symbols = newSymbolArray(setup.alphabetSize, 0);
  }

  push(chunk: SymbolChunk): void {
    this.#inner.push(chunk);
    const { symbols, messageEnds } = chunk;
    const before = this.#symbolCount;
    this.#symbols = growSymbols(this.#symbols, this.#setup.alphabetSize, before, symbols.length);
    this.#symbols.set(symbols, before);
    this.#symbolCount += symbols.length;
    if (this.#messageCount + messageEnds.length > this.#ends.length) {
      const grown = new Uint32Array(
        Math.max(this.#messageCount + messageEnds.length, this.#ends.length * 2),
      );
      grown.set(this.#ends);
      this.#ends = grown;
    }
    for (let i = 0; i < messageEnds.length; i++)
      this.#ends[this.#messageCount++] = before + messageEnds[i];
  }

  finish(): Coded {
    const setup = this.#setup;
    const width = symbolWidth(setup.alphabetSize);
    const coded = this.#inner.finish();
    const writer = new BitWriter(coded.bytes.length + 64);
    const ledger = new MessageLedger(setup.align);
    const symbols = this.#symbols;
    // Symbols and ends of the messages that stay coded.
    const kept = newSymbolArray(setup.alphabetSize, this.#symbolCount);
    const keptEnds = new Uint32Array(this.#messageCount);
    let keptSymbols = 0;
    let keptMessages = 0;
    let keptBits = 0;
    let from = 0;
    let fromBits = 0;
    for (let i = 0; i < this.#messageCount; i++) {
      const to = this.#ends[i];
      const toBits = coded.messageEndsBits[i];
      const takesCoded = isCoded(setup, width, to - from, toBits - fromBits);
      writer.writeBits(takesCoded ? 0 : 1, 1);
      ledger.indexBits++;
      ledger.framingBits += writeSymbolCount(writer, setup, to - from);
      if (takesCoded) {
        writeBitsOf(writer, coded.bytes, fromBits, toBits);
        ledger.writtenBits += toBits - fromBits;
        for (let at = from; at < to; at++) kept[keptSymbols++] = symbols[at];
        keptEnds[keptMessages++] = keptSymbols;
        keptBits += toBits - fromBits;
      } else {
        for (let at = from; at < to; at++) writer.writeBits(symbols[at], width);
        ledger.writtenBits += (to - from) * width;
        ledger.payloadBits += (to - from) * width;
      }
      ledger.close(writer);
      from = to;
      fromBits = toBits;
    }
    const own =
      keptMessages === this.#messageCount
        ? coded
        : this.#codeAgain(kept.subarray(0, keptSymbols), keptEnds.subarray(0, keptMessages));
    return withAccountOf(own, keptBits, ledger.finish(writer));
  }

  /** The messages that stay coded, alone: the same bits, and the account that belongs to them. */
  #codeAgain(symbols: SymbolArray, messageEnds: Uint32Array): Coded {
    const { alphabetSize } = this.#setup;
    const encoder = this.#coder.encoder(innerSetup(this.#setup));
    encoder.push({ alphabetSize, symbols, messageEnds });
    return encoder.finish();
  }
}

/** Books the coder's bits, so far all called written, on the lines where the coder itself books them. */
function withAccountOf(own: Coded, ownBits: number, all: Coded): Coded {
  const account = { ...all.account };
  account.writtenBits -= ownBits;
  let booked = 0;
  for (const line of Object.keys(own.account) as (keyof typeof account)[]) {
    account[line] += own.account[line];
    booked += own.account[line];
  }
  if (booked !== ownBits) {
    throw new BugError('messages coded alone do not have the bits that they have among others', {
      expected: `${ownBits} bits`,
      got: `${booked} bits`,
    });
  }
  return { ...all, account, payloadBits: all.payloadBits + own.payloadBits };
}
