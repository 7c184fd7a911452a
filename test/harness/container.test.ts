import { crc32 } from 'node:zlib';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { TablePolicy } from '../../src/coders/contract.ts';
import {
  BitassayError,
  CorruptStreamError,
  InputError,
  LimitError,
  NotYetError,
} from '../../src/errors/errors.ts';
import { packContainer, unpackContainer, usualPolicy } from '../../src/harness/container.ts';
import { integers } from '../conformance/sequences.ts';

function pack(
  content: Uint8Array,
  candidate = 'fixed',
  symbolsAs = 'bytes',
  policy: TablePolicy = usualPolicy(parseCandidate(candidate)),
) {
  return packContainer({
    candidate: parseCandidate(candidate),
    symbolsAs,
    policy,
    content,
    file: 'tracker.bin',
  });
}

const text = (words: string) => new TextEncoder().encode(words);
const line = text('supply -18.3, return -17.1, door shut; ');

/** A copy of a container with its header's checksum made right again (by the library's CRC-32, not ours). */
function withRightChecksum(bytes: Uint8Array): Uint8Array {
  const copy = bytes.slice();
  if (copy.length < 13) return copy;
  const view = new DataView(copy.buffer);
  const end = 9 + view.getUint32(5, true);
  if (end + 4 <= copy.length) view.setUint32(end, crc32(copy.subarray(0, end)), true);
  return copy;
}

describe('a container', () => {
  const takers: [string, fc.Arbitrary<Uint8Array>][] = [
    ['bytes', fc.uint8Array({ maxLength: 400 })],
    ['bits', fc.uint8Array({ maxLength: 60 })],
    ['nibbles', fc.uint8Array({ maxLength: 200 })],
    ['u16le', fc.uint8Array({ maxLength: 200 }).map((b) => b.subarray(0, b.length & ~1))],
    ['s16be', fc.uint8Array({ maxLength: 200 }).map((b) => b.subarray(0, b.length & ~1))],
    ['codepoints', fc.string({ unit: 'binary', maxLength: 120 }).map(text)],
  ];

  it.each(takers)('gives back any content taken as %s', (symbolsAs, contents) => {
    const candidates = fc.constantFrom(
      'fixed',
      'huffman',
      'arith:order=1',
      'deflate:level=3',
      'brotli:quality=2',
    );
    fc.assert(
      fc.property(contents, candidates, (content, candidate) => {
        const packed = pack(content, candidate, symbolsAs);
        const { content: restored, header } = unpackContainer(packed.bytes, content.length);
        expect(Buffer.compare(restored, content)).toBe(0);
        expect(header).toEqual(packed.header);
        expect(header.candidate).toBe(candidate);
        expect(header.symbolsAs).toBe(symbolsAs);
        expect(header.contentBytes).toBe(content.length);
      }),
      { seed: 42, numRuns: 80 },
    );
  });

  it('says what it is to whoever looks at its first bytes', () => {
    const { bytes } = pack(line, 'deflate:level=3');
    const opening = Buffer.from(bytes).toString('latin1');
    expect(opening.slice(0, 4)).toBe('BASY');
    expect(bytes[4]).toBe(1);
    expect(opening).toContain('deflate:level=3');
    expect(opening).toContain('bytes');
  });

  it('holds the CRC-32 of content, coded bytes and header that the library computes', () => {
    const { bytes, header, headerBytes } = pack(line);
    expect(header.contentCrc32).toBe(crc32(line));
    expect(header.codedCrc32).toBe(crc32(bytes.subarray(headerBytes)));
    expect(withRightChecksum(bytes)).toEqual(bytes);
  });

  it('pays for the symbol count once: fixed bytes, and one Elias delta count before them', () => {
    const { bytes, headerBytes, symbolCount } = pack(line);
    expect(symbolCount).toBe(line.length);
    // Elias 1975: 40 = 101000b has 6 bits, 6 = 110b has 3: 2 zeros, 110, then 01000: 10 bits; and 39 bytes.
    expect(line.length).toBe(39);
    expect(8 * (bytes.length - headerBytes)).toBe(Math.ceil((10 + 8 * 39) / 8) * 8);
  });

  it('takes an empty file', () => {
    for (const symbolsAs of ['bytes', 'bits', 'u16le', 'codepoints']) {
      for (const candidate of ['fixed', 'deflate']) {
        const { bytes } = pack(new Uint8Array(0), candidate, symbolsAs);
        expect(unpackContainer(bytes).content.length).toBe(0);
      }
    }
  });

  it('holds the tables or none, as asked; if nobody asks, the coder learns if it can', () => {
    const usual = ['fixed', 'huffman', 'arith:order=1'].map((c) => usualPolicy(parseCandidate(c)));
    expect(usual).toEqual(['none', 'sent', 'learned']);
    for (const policy of ['sent', 'learned'] as const) {
      const { bytes, header } = pack(line, 'arith:order=1', 'bytes', policy);
      expect(header.policy).toBe(policy);
      expect(unpackContainer(bytes).content).toEqual(line);
    }
  });

  it('is deterministic', () => {
    expect(pack(line, 'deflate').bytes).toEqual(pack(line, 'deflate').bytes);
  });
});

describe('harm to a container', () => {
  const sample = (content: Uint8Array, candidate: string, symbolsAs = 'bytes') => ({
    content,
    ...pack(content, candidate, symbolsAs),
  });
  const samples = [
    sample(line, 'fixed'),
    sample(line, 'huffman'),
    sample(line, 'arith:order=2'),
    sample(line, 'deflate'),
    sample(line, 'fixed', 'codepoints'),
    sample(text('é×−'), 'brotli:quality=3', 'codepoints'),
    sample(new Uint8Array(0), 'fixed'),
    sample(Uint8Array.of(7), 'fixed'),
  ];

  it('is found whichever bit is flipped', () => {
    for (const { bytes } of samples) {
      for (let bit = 0; bit < bytes.length * 8; bit++) {
        const harmed = bytes.slice();
        harmed[bit >> 3] ^= 1 << (bit & 7);
        expect(() => unpackContainer(harmed), `bit ${bit}`).toThrow(BitassayError);
        if (bit >= 40) {
          expect(() => unpackContainer(harmed), `bit ${bit}`).toThrow(CorruptStreamError);
        }
      }
    }
  });

  it('is found wherever the file is cut', () => {
    for (const { bytes } of samples) {
      for (let length = 0; length < bytes.length; length++) {
        const cut = () => unpackContainer(bytes.subarray(0, length));
        expect(cut, `${length} bytes`).toThrow(length === 0 ? InputError : CorruptStreamError);
        if (length > 0) expect(cut, `${length} bytes`).toThrow(/cut/);
      }
    }
  });

  it('is found when bytes follow', () => {
    for (const { bytes } of samples) {
      for (const more of [0, 1, 255]) {
        expect(() => unpackContainer(Uint8Array.of(...bytes, more))).toThrow(/after the end/);
      }
    }
  });

  it('is found in any random bytes, with or without the right opening', () => {
    fc.assert(
      fc.property(fc.uint8Array({ maxLength: 80 }), fc.boolean(), (noise, opened) => {
        const opening = opened
          ? [0x42, 0x41, 0x53, 0x59, 1, Math.max(0, noise.length - 4), 0, 0, 0]
          : [];
        expect(() =>
          unpackContainer(withRightChecksum(Uint8Array.of(...opening, ...noise))),
        ).toThrow(BitassayError);
      }),
      { seed: 3, numRuns: 500 },
    );
  });

  it('made on purpose, with right checksums, gives a typed error or the content', () => {
    const next = integers(9);
    for (let round = 0; round < 3000; round++) {
      const { bytes, headerBytes, content } = samples[next() % samples.length];
      const harmed = bytes.slice();
      for (let times = next() % 3; times >= 0; times--) {
        harmed[9 + (next() % (headerBytes - 13))] ^= 1 << (next() % 8);
      }
      try {
        const restored = unpackContainer(withRightChecksum(harmed), 100_000).content;
        // Another level of deflate, say, does not change what is decoded.
        expect(Buffer.compare(restored, content)).toBe(0);
      } catch (error) {
        if (error instanceof CorruptStreamError || error instanceof LimitError) continue;
        if (error instanceof InputError) continue;
        throw error;
      }
    }
  });
});

describe('refusals', () => {
  it('name another kind of file, and another version', () => {
    expect(() => unpackContainer(text('%PDF-1.7 and so on'))).toThrow(/no file of bitassay encode/);
    expect(() => unpackContainer(new Uint8Array(0))).toThrow(InputError);
    const newer = pack(line).bytes;
    newer[4] = 2;
    expect(() => unpackContainer(newer)).toThrow(/version that this program does not read/);
  });

  it('hold the content against the limit before anything is decoded', () => {
    const { bytes } = pack(line);
    expect(unpackContainer(bytes, line.length).content).toEqual(line);
    expect(() => unpackContainer(bytes, line.length - 1)).toThrow(LimitError);
  });

  it('name takers from whose symbols no file can be made again', () => {
    expect(() => pack(line, 'fixed', 'csv:temperature')).toThrow(/only a part of a file/);
    expect(() => pack(line, 'fixed', 'field:dt')).toThrow(InputError);
    expect(() => pack(line, 'fixed', 'byte')).toThrow(InputError);
  });

  it('name content that the taker cannot read', () => {
    expect(() => pack(Uint8Array.of(1, 2, 3), 'fixed', 'u16le')).toThrow(InputError);
    expect(() => pack(Uint8Array.of(0xff), 'fixed', 'codepoints')).toThrow(InputError);
  });

  it('name policies that the candidate does not have, and those that come later', () => {
    expect(() => pack(line, 'fixed', 'bytes', 'sent')).toThrow(/cannot be coded with sent tables/);
    expect(() => pack(line, 'deflate-preset', 'bytes', 'shipped')).toThrow(NotYetError);
    expect(() => usualPolicy(parseCandidate('deflate-preset'))).toThrow(NotYetError);
  });
});
