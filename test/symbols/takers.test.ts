import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { CorruptStreamError, InputError, NotYetError } from '../../src/errors/errors.ts';
import type { RecordShape } from '../../src/symbols/record.ts';
import { type ByteSegments, oneSegment } from '../../src/symbols/segments.ts';
import { parseSymbolTaker, symbolTakerFamilies } from '../../src/symbols/takers/registry.ts';
import type { Taken, TakenValues } from '../../src/symbols/takers/taker.ts';

/** Messages with bytes between them that belong to none. */
const arbitraryFile = (unit: number) =>
  fc
    .array(
      fc.record({
        between: fc.uint8Array({ maxLength: 3 }),
        content: fc
          .uint8Array({ maxLength: 12 })
          .map((bytes) => bytes.subarray(0, bytes.length - (bytes.length % unit))),
      }),
      { maxLength: 8 },
    )
    .map((pieces) => {
      const bytes: number[] = [];
      const starts: number[] = [];
      const ends: number[] = [];
      for (const { between, content } of pieces) {
        bytes.push(...between);
        starts.push(bytes.length);
        bytes.push(...content);
        ends.push(bytes.length);
      }
      return {
        bytes: Uint8Array.from(bytes),
        segments: { starts: Uint32Array.from(starts), ends: Uint32Array.from(ends) },
        contents: pieces.map((p) => p.content),
      };
    });

function take(
  text: string,
  bytes: Uint8Array,
  segments: ByteSegments = oneSegment(bytes.length),
  record?: RecordShape,
): Taken {
  const source = { file: 'data.bin', bytes, segments };
  return parseSymbolTaker(text).take(record === undefined ? source : { ...source, record });
}

function idsOf(values: TakenValues): number[] {
  if (values.kind !== 'symbols') throw new Error(`ids were wanted, got ${values.kind}`);
  expect(values.symbols.every((s) => s < values.alphabetSize)).toBe(true);
  return Array.from(values.symbols);
}

describe('takers with a natural alphabet', () => {
  test.each([
    ['bytes', 1, 256],
    ['bits', 1, 2],
    ['nibbles', 1, 16],
    ['u16le', 2, 65536],
    ['u16be', 2, 65536],
    ['s16le', 2, 65536],
    ['s16be', 2, 65536],
  ])('%s: untake gives back what lay in the messages', (text, unit, alphabetSize) => {
    const taker = parseSymbolTaker(text);
    fc.assert(
      fc.property(arbitraryFile(unit), ({ bytes, segments, contents }) => {
        const { values, messageEnds } = take(text, bytes, segments);
        if (values.kind !== 'symbols') throw new Error(values.kind);
        expect(values.alphabetSize).toBe(alphabetSize);
        expect(taker.untake?.(values.symbols)).toEqual(
          Uint8Array.from(contents.flatMap((c) => [...c])),
        );
        // Each message alone gives the same symbols as in the file.
        let start = 0;
        contents.forEach((content, i) => {
          const alone = take(text, content).values;
          expect(idsOf(values).slice(start, messageEnds[i])).toEqual(idsOf(alone));
          start = messageEnds[i];
        });
        expect(messageEnds).toHaveLength(contents.length);
        expect(start).toBe(values.symbols.length);
      }),
    );
  });

  test('bits and nibbles run from the high end of a byte', () => {
    expect(idsOf(take('bits', Uint8Array.of(0b10110001)).values)).toEqual([1, 0, 1, 1, 0, 0, 0, 1]);
    expect(idsOf(take('nibbles', Uint8Array.of(0xb1, 0x0f)).values)).toEqual([11, 1, 0, 15]);
  });

  // Reference: Node's Buffer readers of 16-bit numbers.
  test.each([
    ['u16le', (b: Buffer, at: number) => b.readUInt16LE(at)],
    ['u16be', (b: Buffer, at: number) => b.readUInt16BE(at)],
    ['s16le', (b: Buffer, at: number) => b.readInt16LE(at) + 32768],
    ['s16be', (b: Buffer, at: number) => b.readInt16BE(at) + 32768],
  ])('%s reads numbers as Buffer does', (text, read) => {
    fc.assert(
      fc.property(fc.uint8Array({ minLength: 2, maxLength: 40 }), (drawn) => {
        const bytes = drawn.subarray(0, drawn.length - (drawn.length % 2));
        const buffer = Buffer.from(bytes);
        const expected = Array.from({ length: bytes.length / 2 }, (_, i) => read(buffer, 2 * i));
        expect(idsOf(take(text, bytes).values)).toEqual(expected);
      }),
    );
    const ends = Buffer.from([0x00, 0x80, 0xff, 0x7f, 0x00, 0x00, 0xff, 0xff]);
    expect(idsOf(take(text, ends).values)).toEqual([0, 2, 4, 6].map((at) => read(ends, at)));
  });

  test('an odd byte is refused with the size', () => {
    const segments = { starts: Uint32Array.of(0, 4), ends: Uint32Array.of(4, 7) };
    try {
      take('u16le', new Uint8Array(7), segments);
      expect.unreachable();
    } catch (error) {
      expect(error).toBeInstanceOf(InputError);
      const { where, message } = error as InputError;
      expect(message).toContain('data.bin');
      expect(where).toMatchObject({ messageIndex: 1, byteOffset: 6, got: '3 bytes' });
    }
  });

  test('symbols that do not make whole bytes are refused', () => {
    expect(() => parseSymbolTaker('bits').untake?.(new Uint8Array(9))).toThrow(CorruptStreamError);
    expect(() => parseSymbolTaker('nibbles').untake?.(new Uint8Array(3))).toThrow(
      CorruptStreamError,
    );
  });

  test('whole files of bytes are not copied', () => {
    const bytes = Uint8Array.of(1, 2, 3);
    const { values } = take('bytes', bytes);
    expect(values.kind === 'symbols' && values.symbols.buffer === bytes.buffer).toBe(true);
  });
});

describe('field:NAME', () => {
  const record: RecordShape = {
    bytes: 6,
    fields: [
      { name: 'a', type: 'u8', offsetBytes: 0, widthBytes: 1 },
      { name: 'b', type: 's8', offsetBytes: 1, widthBytes: 1 },
      { name: 'c', type: 's16le', offsetBytes: 2, widthBytes: 2 },
      { name: 'd', type: 'u16be', offsetBytes: 4, widthBytes: 2 },
      { name: 'wide', type: 'u32le', offsetBytes: 0, widthBytes: 4 },
    ],
  };

  test('reads each type as Buffer does, message by message', () => {
    fc.assert(
      fc.property(fc.array(fc.uint8Array({ minLength: 6, maxLength: 6 })), (records) => {
        const bytes = Buffer.concat(records);
        const cut = Math.floor(records.length / 3) * 6;
        const segments = {
          starts: Uint32Array.of(0, cut),
          ends: Uint32Array.of(cut, bytes.length),
        };
        const all = records.map((r) => Buffer.from(r));
        const field = (name: string) => {
          const taken = take(`field:${name}`, bytes, segments, record);
          expect(Array.from(taken.messageEnds)).toEqual([cut / 6, records.length]);
          return idsOf(taken.values);
        };
        expect(field('a')).toEqual(all.map((r) => r.readUInt8(0)));
        expect(field('b')).toEqual(all.map((r) => r.readInt8(1) + 128));
        expect(field('c')).toEqual(all.map((r) => r.readInt16LE(2) + 32768));
        expect(field('d')).toEqual(all.map((r) => r.readUInt16BE(4)));
      }),
    );
  });

  test('a ragged file names its size, the record and the rest', () => {
    expect(() => take('field:a', new Uint8Array(20), oneSegment(20), record)).toThrow(
      expect.objectContaining({
        where: expect.objectContaining({
          expected: expect.stringContaining('6 bytes'),
          got: '20 bytes: 3 records and 2 bytes more',
        }),
      }),
    );
  });

  test('a message that cuts a record is refused', () => {
    const segments = { starts: Uint32Array.of(0, 6), ends: Uint32Array.of(6, 10) };
    expect(() => take('field:a', new Uint8Array(12), segments, record)).toThrow(
      expect.objectContaining({
        where: expect.objectContaining({ messageIndex: 1, byteOffset: 6 }),
      }),
    );
  });

  test('wider types are not built yet; unknown names list the fields', () => {
    expect(() => take('field:wide', new Uint8Array(6), oneSegment(6), record)).toThrow(NotYetError);
    expect(() => take('field:wode', new Uint8Array(6), oneSegment(6), record)).toThrow(
      expect.objectContaining({
        where: expect.objectContaining({
          expected: 'one of a, b, c, d, wide',
          advice: 'Did you mean wide?',
        }),
      }),
    );
  });
});

describe('parseSymbolTaker', () => {
  test('knows every word of its list, and keeps the argument', () => {
    for (const { word } of symbolTakerFamilies) {
      const text = word.endsWith(':') ? `${word}some name` : word;
      expect(parseSymbolTaker(text).text).toBe(text);
    }
  });

  test.each([
    ['byte', 'Did you mean bytes?'],
    ['codepoint', 'Did you mean codepoints?'],
    ['u16el', 'Did you mean u16le?'],
    ['cvs:speed', 'Did you mean csv:COLUMN?'],
    ['csv', 'Did you mean csv:COLUMN?'],
    ['csv:', 'Did you mean csv:COLUMN?'],
    ['bytes:3', 'Did you mean bytes?'],
  ])('%s: %s', (text, advice) => {
    expect(() => parseSymbolTaker(text)).toThrow(
      expect.objectContaining({ name: 'InputError', where: expect.objectContaining({ advice }) }),
    );
  });

  test.each(['words', 'json:/a/b', 'parquet:speed'])('%s is not built yet', (text) => {
    expect(() => parseSymbolTaker(text)).toThrow(NotYetError);
  });
});
