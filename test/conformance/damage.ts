/**
 * Hostile inputs made from an honest one: cut, flipped, random and lengthened bytes, and wrong
 * framing.
 */
import type { CodedInput } from '../../src/coders/contract.ts';
import { integers } from './sequences.ts';

/**
 * Damaged forms of `input`, the same for the same seed; `align` is the one that message ends keep.
 */
export function damaged(input: CodedInput, seed: number, align: number): CodedInput[] {
  const next = integers(seed);
  const result: CodedInput[] = [];
  const { bytes } = input;
  const withBytes = (changed: Uint8Array) => result.push({ ...input, bytes: changed });

  for (let i = 0; i < 3; i++) withBytes(bytes.slice(0, next() % (bytes.length + 1)));
  for (let i = 0; i < 6 && bytes.length > 0; i++) {
    const changed = bytes.slice();
    const at = next() % (i < 3 ? Math.min(bytes.length, 6) : bytes.length);
    changed[at] ^= 1 << (next() % 8);
    withBytes(changed);
  }
  if (bytes.length > 0) {
    const changed = bytes.slice();
    for (let i = 0; i < 4; i++) changed[next() % changed.length] = next() & 0xff;
    withBytes(changed);
  }
  for (const value of [0x00, 0xff]) withBytes(new Uint8Array(bytes.length + 8).fill(value));
  for (let i = 0; i < 3; i++) {
    const noise = new Uint8Array(bytes.length + (next() % 24));
    for (let j = 0; j < noise.length; j++) noise[j] = next() & 0xff;
    withBytes(noise);
  }

  const { messageCount } = input;
  result.push({ ...input, messageCount: messageCount + 1 });
  if (input.messageEndsBits !== undefined && messageCount > 0) {
    for (let i = 0; i < 3; i++) {
      const messageEndsBits = input.messageEndsBits.slice();
      const by = (1 + (next() % 4)) * align * (next() % 2 === 0 ? 1 : -1);
      messageEndsBits[next() % messageCount] += by;
      result.push({ ...input, messageEndsBits });
    }
    result.push({ ...input, messageEndsBits: input.messageEndsBits.map((end) => end + 0.5) });
  } else if (input.symbolCounts !== undefined && messageCount > 0) {
    for (let i = 0; i < 3; i++) {
      const symbolCounts = input.symbolCounts.slice();
      const at = next() % messageCount;
      symbolCounts[at] = i === 0 ? symbolCounts[at] + 1 : next() % 40;
      result.push({ ...input, symbolCounts });
    }
  } else {
    // Under `sent` nothing but the bytes and the number of messages is given.
    result.push({ ...input, messageCount: Math.max(0, messageCount - 1) });
  }
  return result;
}
