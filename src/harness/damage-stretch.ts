import { placeBits } from '../bits/place-bits.ts';
import type { CodedInput, Lengths } from '../coders/contract.ts';
import { type SymbolSequence, sliceMessages } from '../symbols/sequence.ts';
import type { CodedUnit } from './run-cell.ts';

/** Coded messages that a receiver decodes in one go, with what was coded. */
export interface Stretch {
  readonly bytes: Uint8Array;
  readonly messageEndsBits: Float64Array;
  readonly messages: SymbolSequence;
}

/** What arrives of a stretch. */
export interface Arrived {
  readonly bytes: Uint8Array;
  readonly messageEndsBits: Float64Array;
  readonly symbolCounts: Uint32Array;
}

export function startBitOf({ messageEndsBits }: Pick<Stretch, 'messageEndsBits'>, index: number) {
  return index === 0 ? 0 : messageEndsBits[index - 1];
}

export function symbolStartOf({ messageEnds }: SymbolSequence, index: number): number {
  return index === 0 ? 0 : messageEnds[index - 1];
}

function countsOf(messages: SymbolSequence): Uint32Array {
  return messages.messageEnds.map((end, i) => end - symbolStartOf(messages, i));
}

function bytesFor(bits: number): Uint8Array {
  return new Uint8Array(Math.ceil(bits / 8));
}

/** A unit that is decoded as a whole. */
export function wholeStretch({ coded, messages }: CodedUnit): Stretch {
  return { bytes: coded.bytes, messageEndsBits: coded.messageEndsBits, messages };
}

/** One message of a unit, which decodes alone. */
export function messageStretch({ coded, messages }: CodedUnit, index: number): Stretch {
  const from = startBitOf(coded, index);
  const to = coded.messageEndsBits[index];
  const bytes = bytesFor(to - from);
  placeBits(coded.bytes, from, to, bytes, 0);
  return {
    bytes,
    messageEndsBits: Float64Array.of(to - from),
    messages: sliceMessages(messages, index, index + 1),
  };
}

/** The stretch as it was sent. */
export function unharmed({ bytes, messageEndsBits, messages }: Stretch): Arrived {
  return { bytes, messageEndsBits, symbolCounts: countsOf(messages) };
}

/** With these bits of a message inverted. */
export function withFlips(stretch: Stretch, index: number, places: readonly number[]): Arrived {
  const bytes = stretch.bytes.slice();
  const start = startBitOf(stretch, index);
  for (const place of places) {
    const bit = start + place;
    bytes[Math.floor(bit / 8)] ^= 0x80 >>> (bit % 8);
  }
  return { ...unharmed(stretch), bytes };
}

/** Bytes of a message, its last perhaps not whole. */
export function byteCountOf(stretch: Stretch, index: number): number {
  return Math.ceil((stretch.messageEndsBits[index] - startBitOf(stretch, index)) / 8);
}

/**
 * Without these bytes of a message, counted from its first bit. Where the link carries byte lengths it carries what is left,
 * filled up with zeros to `align`.
 * @param places  in rising order
 */
export function withoutBytes(
  stretch: Stretch,
  index: number,
  places: readonly number[],
  lengths: Lengths,
  align: number,
): Arrived {
  const start = startBitOf(stretch, index);
  const end = stretch.messageEndsBits[index];
  const bytes = new Uint8Array(stretch.bytes.length + align / 8 + 1);
  placeBits(stretch.bytes, 0, start, bytes, 0);
  let read = start;
  let at = start;
  const keepUpTo = (to: number): void => {
    placeBits(stretch.bytes, read, to, bytes, at);
    at += to - read;
  };
  for (const place of places) {
    keepUpTo(start + 8 * place);
    read = Math.min(end, start + 8 * (place + 1));
  }
  keepUpTo(end);
  if (lengths === 'link') at = start + Math.ceil((at - start) / align) * align;
  const moved = at - end;
  const last = stretch.messageEndsBits.length - 1;
  const total = stretch.messageEndsBits[last];
  placeBits(stretch.bytes, end, total, bytes, at);
  return {
    ...unharmed(stretch),
    bytes: bytes.subarray(0, Math.ceil((total + moved) / 8)),
    messageEndsBits: stretch.messageEndsBits.map((bits, i) => (i < index ? bits : bits + moved)),
  };
}

/** Without the messages `from` (inclusive) to `to` (exclusive); the receiver does not know that there were any. */
export function withoutMessages(stretch: Stretch, from: number, to: number): Arrived {
  const start = startBitOf(stretch, from);
  const end = startBitOf(stretch, to);
  const total = stretch.messageEndsBits[stretch.messageEndsBits.length - 1];
  const bytes = bytesFor(total - (end - start));
  placeBits(stretch.bytes, 0, start, bytes, 0);
  placeBits(stretch.bytes, end, total, bytes, start);
  const left = <T>(_: T, i: number): boolean => i < from || i >= to;
  const { messageEndsBits, symbolCounts } = unharmed(stretch);
  return {
    bytes,
    messageEndsBits: messageEndsBits
      .filter(left)
      .map((bits, i) => (i < from ? bits : bits - (end - start))),
    symbolCounts: symbolCounts.filter(left),
  };
}

/** What a decoder is given of it, as the lengths rule grants. */
export function inputOf(arrived: Arrived, lengths: Lengths): CodedInput {
  const { bytes, messageEndsBits, symbolCounts } = arrived;
  return {
    bytes,
    messageCount: messageEndsBits.length,
    ...(lengths === 'link' ? { messageEndsBits } : {}),
    ...(lengths === 'known' ? { symbolCounts } : {}),
  };
}
