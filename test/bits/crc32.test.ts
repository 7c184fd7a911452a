import * as zlib from 'node:zlib';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { crc32 } from '../../src/bits/crc32.ts';

/** Node has its own from 20.15 and 22.2 on. */
const nodeCrc32 = (zlib as { crc32?: (bytes: Uint8Array, before?: number) => number }).crc32;

/** The polynomial division itself, bit by bit, on a message with its bits reflected: no table. */
function slowCrc32(bytes: Uint8Array): number {
  let remainder = 0xffffffff;
  for (const byte of bytes) {
    for (let bit = 0; bit < 8; bit++) {
      const feedback = ((remainder ^ (byte >>> bit)) & 1) === 1;
      remainder >>>= 1;
      if (feedback) remainder = (remainder ^ 0xedb88320) >>> 0;
    }
  }
  return (remainder ^ 0xffffffff) >>> 0;
}

describe('crc32', () => {
  // The check value that catalogues of CRC parameters give for the CRC of ITU-T V.42
  // (CRC-32/ISO-HDLC).
  it('of the digits 1 to 9 is CBF43926', () => {
    expect(crc32(new TextEncoder().encode('123456789'))).toBe(0xcbf43926);
  });

  it('of nothing is 0', () => {
    expect(crc32(new Uint8Array(0))).toBe(0);
  });

  it('equals the division bit by bit, and zlib where Node has it; and goes on from a former value', () => {
    fc.assert(
      fc.property(fc.uint8Array({ maxLength: 300 }), fc.nat(), (bytes, pick) => {
        const value = crc32(bytes);
        expect(value).toBe(slowCrc32(bytes));
        if (nodeCrc32 !== undefined) expect(value).toBe(nodeCrc32(bytes));
        const cut = pick % (bytes.length + 1);
        expect(crc32(bytes.subarray(cut), crc32(bytes.subarray(0, cut)))).toBe(value);
      }),
    );
  });

  it('changes with every single bit', () => {
    fc.assert(
      fc.property(fc.uint8Array({ minLength: 1, maxLength: 64 }), fc.nat(), (bytes, pick) => {
        const flipped = bytes.slice();
        flipped[(pick >>> 3) % bytes.length] ^= 1 << (pick & 7);
        expect(crc32(flipped)).not.toBe(crc32(bytes));
      }),
    );
  });
});
