import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  everyEnds,
  type MessageRule,
  parseMessageRule,
  segmentFile,
  usualLengths,
} from '../../src/corpus/messages.ts';

/** The messages as slices of the bytes. */
function cut(rule: string, bytes: Uint8Array, recordBytes?: number): Uint8Array[] {
  const record = recordBytes === undefined ? undefined : { bytes: recordBytes, fields: [] };
  const { starts, ends } = segmentFile(parseMessageRule(rule), bytes, 'events.log', record);
  return Array.from(starts, (start, i) => bytes.slice(start, ends[i]));
}

const textOf = (parts: Uint8Array[]) => parts.map((p) => Buffer.from(p).toString('latin1'));

describe('parseMessageRule', () => {
  test.each<[string, MessageRule]>([
    ['whole', { kind: 'whole' }],
    [' lines ', { kind: 'lines' }],
    ['every=1', { kind: 'every', count: 1 }],
    ['every=2147483648', { kind: 'every', count: 2 ** 31 }],
    ['records=8', { kind: 'records', count: 8 }],
    ['prefix=u16be', { kind: 'prefix', type: 'u16be' }],
  ])('%s', (text, rule) => {
    expect(parseMessageRule(text)).toEqual(rule);
  });

  test.each([
    ['line', 'Did you mean lines?'],
    ['wohle', 'Did you mean whole?'],
    ['evry=4', 'Did you mean every?'],
    ['prefix=u16el', 'Did you mean u16le?'],
    ['lines=3', 'Did you mean lines?'],
    ['every', undefined],
    ['every=0', undefined],
    ['every=2147483649', undefined],
    ['every=1.5', undefined],
    ['records=-1', undefined],
    ['prefix', undefined],
    ['prefix=toString', undefined],
    ['', undefined],
  ])('%j is refused', (text, advice) => {
    try {
      parseMessageRule(text);
      expect.unreachable();
    } catch (error) {
      expect(error).toMatchObject({ name: 'InputError', where: { got: text } });
      expect((error as { where: { advice?: string } }).where.advice).toBe(advice);
    }
  });

  test('units are so many bytes, lines or rows', () => {
    for (const [text, unit] of [
      ['fill=192,unit=24', 24],
      ['fill=192,unit=line', 'line'],
      ['fill=192,unit=row', 'row'],
    ])
      expect(parseMessageRule(String(text))).toEqual({ kind: 'fill', bytes: 192, unit });
  });
});

describe('usualLengths', () => {
  test.each([
    ['whole', 'sent'],
    ['lines', 'sent'],
    ['every=4', 'link'],
    ['records=8', 'link'],
    ['prefix=u8', 'link'],
  ])('%s: %s', (text, lengths) => {
    expect(usualLengths(parseMessageRule(text))).toBe(lengths);
  });
});

describe('segmentFile', () => {
  test.each([
    ['', []],
    ['\n', ['']],
    ['a', ['a']],
    ['a\n', ['a']],
    ['a\nbc', ['a', 'bc']],
    ['\n\na\n\n', ['', '', 'a', '']],
    ['a\r\nb\r\n', ['a\r', 'b\r']],
  ])('lines of %j', (text, lines) => {
    expect(textOf(cut('lines', Buffer.from(text)))).toEqual(lines);
  });

  test('lines agree with splitting the text at newlines', () => {
    const text = fc.string({ unit: fc.constantFrom('a', 'b', '\n', '\r'), maxLength: 60 });
    fc.assert(
      fc.property(text, (t) => {
        const expected = t.split('\n');
        if (expected.at(-1) === '') expected.pop();
        expect(textOf(cut('lines', Buffer.from(t)))).toEqual(expected);
      }),
    );
  });

  test('whole is the file', () => {
    expect(cut('whole', Buffer.from('a\nb'))).toHaveLength(1);
  });

  test('records cover a whole number of records, the last message shorter', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 5 }),
        fc.integer({ min: 1, max: 5 }),
        fc.nat(30),
        (recordBytes, perMessage, records) => {
          const bytes = Uint8Array.from({ length: recordBytes * records }, (_, i) => i);
          const parts = cut(`records=${perMessage}`, bytes, recordBytes);
          expect(Buffer.concat(parts)).toEqual(Buffer.from(bytes));
          expect(parts).toHaveLength(Math.ceil(records / perMessage));
          for (const part of parts.slice(0, -1))
            expect(part).toHaveLength(recordBytes * perMessage);
        },
      ),
    );
  });

  test('a ragged record file is refused', () => {
    expect(() => cut('records=8', new Uint8Array(100), 24)).toThrow(
      expect.objectContaining({
        message: 'events.log is not a whole number of records',
        where: expect.objectContaining({
          got: '100 bytes: 4 records and 4 bytes more',
          expected: expect.stringContaining('24'),
        }),
      }),
    );
  });

  test('records without a record are refused', () => {
    expect(() => cut('records=8', new Uint8Array(24))).toThrow(/need to know the record/);
  });

  // Reference: Node's Buffer writers of unsigned numbers.
  test.each([
    ['u8', 1, (b: Buffer, v: number) => b.writeUInt8(v)],
    ['u16le', 2, (b: Buffer, v: number) => b.writeUInt16LE(v)],
    ['u16be', 2, (b: Buffer, v: number) => b.writeUInt16BE(v)],
    ['u32le', 4, (b: Buffer, v: number) => b.writeUInt32LE(v)],
    ['u32be', 4, (b: Buffer, v: number) => b.writeUInt32BE(v)],
  ])('prefix=%s: frames come back, a cut one is refused where it begins', (type, width, write) => {
    const frames = fc.array(fc.uint8Array({ maxLength: 20 }), { minLength: 1, maxLength: 6 });
    fc.assert(
      fc.property(frames, fc.nat(), (contents, cutAt) => {
        const written = contents.map((content) => {
          const prefix = Buffer.alloc(width);
          write(prefix, content.length);
          return Buffer.concat([prefix, content]);
        });
        const bytes = Buffer.concat(written);
        expect(cut(`prefix=${type}`, bytes).map((p) => [...p])).toEqual(
          contents.map((c) => [...c]),
        );

        const last = written.at(-1) ?? Buffer.alloc(0);
        const short = bytes.subarray(0, bytes.length - 1 - (cutAt % last.length));
        const broken = bytes.length - last.length;
        if (short.length === broken) {
          expect(cut(`prefix=${type}`, short)).toHaveLength(contents.length - 1);
          return;
        }
        expect(() => cut(`prefix=${type}`, short)).toThrow(
          expect.objectContaining({
            name: 'InputError',
            where: expect.objectContaining({
              byteOffset: broken,
              messageIndex: contents.length - 1,
            }),
          }),
        );
      }),
    );
  });

  test('a prefix of 4 GiB is a broken frame, not a hang', () => {
    expect(() => cut('prefix=u32be', Uint8Array.of(255, 255, 255, 255, 1))).toThrow(
      expect.objectContaining({
        where: expect.objectContaining({ expected: '4294967295 more bytes', got: '1' }),
      }),
    );
  });
});

describe('everyEnds', () => {
  test('messages of N symbols cover the file, the last one shorter', () => {
    fc.assert(
      fc.property(fc.nat(200), fc.integer({ min: 1, max: 50 }), (symbolCount, count) => {
        const ends = [0, ...everyEnds(symbolCount, count)];
        expect(ends.at(-1)).toBe(symbolCount);
        const sizes = ends.slice(1).map((end, i) => end - ends[i]);
        for (const size of sizes.slice(0, -1)) expect(size).toBe(count);
        if (sizes.length > 0) expect(sizes.at(-1)).toBeGreaterThan(0);
      }),
    );
  });
});
