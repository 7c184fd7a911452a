import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import { parseRecordField, type RecordShape } from '../../src/symbols/record.ts';
import { RecordLayout } from '../../src/symbols/record-layout.ts';

const BYTE_TYPES: [string, number][] = [
  ['u8', 1],
  ['s8', 1],
  ...['u', 's'].flatMap((sign) =>
    [16, 24, 32].flatMap((bits): [string, number][] => [
      [`${sign}${bits}le`, bits / 8],
      [`${sign}${bits}be`, bits / 8],
    ]),
  ),
];

/** Random layouts: fields one after another with gaps of bits or bytes between, then shuffled. */
const shapes: fc.Arbitrary<RecordShape> = fc
  .tuple(
    fc.array(
      fc.record({
        gapBits: fc.constantFrom(0, 0, 0, 1, 3, 8, 13),
        kind: fc.nat(),
        isBits: fc.boolean(),
        width: fc.integer({ min: 1, max: 32 }),
        signed: fc.boolean(),
        order: fc.nat(),
      }),
      { maxLength: 9 },
    ),
    fc.nat({ max: 3 }),
  )
  .map(([draws, tail]) => {
    const texts: { name: string; text: string; order: number }[] = [];
    let bit = 0;
    draws.forEach(({ gapBits, kind, isBits, width, signed, order }, i) => {
      bit += gapBits;
      let text: string;
      if (isBits) {
        if ((bit % 8) + width > 32) bit = 8 * Math.ceil(bit / 8);
        text = `${signed ? 's' : 'u'}${width}@${Math.floor(bit / 8)}.${bit % 8}`;
        bit += width;
      } else {
        const [type, bytes] = BYTE_TYPES[kind % BYTE_TYPES.length];
        const at = Math.ceil(bit / 8);
        text = `${type}@${at}`;
        bit = 8 * (at + bytes);
      }
      texts.push({ name: `f${i}`, text, order });
    });
    const bytes = Math.max(1, Math.ceil(bit / 8) + tail);
    texts.sort((a, b) => a.order - b.order);
    return { bytes, fields: texts.map(({ name, text }) => parseRecordField(name, text, bytes)) };
  });

/** A field's value bit by bit, from the words of the notation. */
function slowValue(bytes: Uint8Array, text: { type: string; at: number; bit?: number }): number {
  const width = Number(/\d+/.exec(text.type)![0]);
  let value = 0;
  for (let i = 0; i < width; i++) {
    let place: number;
    if (text.bit !== undefined) place = 8 * text.at + text.bit + i;
    else if (text.type.endsWith('be')) place = 8 * (text.at + width / 8 - 1 - (i >> 3)) + (i % 8);
    else place = 8 * text.at + i;
    value += ((bytes[place >> 3] >> (place % 8)) & 1) * 2 ** i;
  }
  return value;
}

const withBytes = shapes.chain((shape) =>
  fc.tuple(
    fc.constant(shape),
    fc.uint8Array({ minLength: shape.bytes, maxLength: shape.bytes }),
    fc.nat({ max: 3 }),
  ),
);

describe('RecordLayout', () => {
  it('takes any record apart and puts it together again', () => {
    fc.assert(
      fc.property(withBytes, ([shape, record, at]) => {
        const layout = new RecordLayout(shape);
        const values = new Uint32Array(layout.partCount);
        const source = new Uint8Array(at + shape.bytes + 2).fill(0xff);
        source.set(record, at);
        layout.takeApart(source, at, values);
        const target = new Uint8Array(source.length);
        layout.putTogether(values, target, at);
        expect(target.subarray(at, at + shape.bytes)).toEqual(record);
        expect(target.subarray(0, at).every((byte) => byte === 0)).toBe(true);
        expect(target.subarray(at + shape.bytes).every((byte) => byte === 0)).toBe(true);
      }),
      { numRuns: 300 },
    );
  });

  it('gives each declared field the value that its notation says', () => {
    fc.assert(
      fc.property(withBytes, ([shape, record]) => {
        const layout = new RecordLayout(shape);
        const values = new Uint32Array(layout.partCount);
        layout.takeApart(record, 0, values);
        for (const field of shape.fields) {
          const part = layout.names.indexOf(field.name);
          const { type, offsetBytes, bits } = field;
          const place = { type, at: offsetBytes, ...(bits && { bit: bits.from }) };
          expect(values[part], field.name).toBe(slowValue(record, place));
          expect(layout.signed[part]).toBe(type.startsWith('s') ? 1 : 0);
        }
      }),
      { numRuns: 300 },
    );
  });

  it('gives every bit to one part, and nameless bytes parts of their own', () => {
    fc.assert(
      fc.property(shapes, (shape) => {
        const layout = new RecordLayout(shape);
        const width = layout.widths.reduce((sum, bits) => sum + bits, 0);
        expect(width).toBe(8 * shape.bytes);
        // Every value of all ones in one part and zeros elsewhere touches other bits.
        let all = 0n;
        for (let part = 0; part < layout.partCount; part++) {
          const values = new Uint32Array(layout.partCount);
          values[part] = 2 ** layout.widths[part] - 1;
          const bytes = new Uint8Array(shape.bytes);
          layout.putTogether(values, bytes, 0);
          const own = BigInt(`0x${Buffer.from(bytes).toString('hex')}`);
          expect(all & own).toBe(0n);
          all |= own;
        }
        expect(all).toBe(2n ** BigInt(8 * shape.bytes) - 1n);
      }),
    );
  });

  it('names what lies between fields after its place', () => {
    const fields = [
      parseRecordField('late', 'u8@4', 6),
      parseRecordField('middle', 'u3@1.2', 6),
      parseRecordField('early', 'u8@0', 6),
    ];
    const layout = new RecordLayout({ bytes: 6, fields });
    expect(layout.names).toEqual(['early', '@1.0', 'middle', '@1.5', '@2', '@3', 'late', '@5']);
    expect([...layout.widths]).toEqual([8, 2, 3, 3, 8, 8, 8, 8]);
  });

  it('refuses fields that overlap, and a record beyond its bound', () => {
    const fields = [parseRecordField('a', 'u16le@0', 4), parseRecordField('b', 'u8@1', 4)];
    expect(() => new RecordLayout({ bytes: 4, fields })).toThrow('the fields a and b overlap');
    expect(() => new RecordLayout({ bytes: 4097, fields: [] })).toThrow(InputError);
  });
});
