import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { oneSegment } from '../../src/symbols/segments.ts';
import { csvWindows } from '../../src/symbols/takers/csv-windows.ts';
import { parseSymbolTaker } from '../../src/symbols/takers/registry.ts';

function take(column: string, text: string | Uint8Array, step?: number) {
  const bytes = typeof text === 'string' ? new TextEncoder().encode(text) : text;
  const source = { file: 'positions.csv', bytes, segments: oneSegment(bytes.length) };
  return parseSymbolTaker(`csv:${column}`).take(step === undefined ? source : { ...source, step })
    .values;
}

function cells(column: string, text: string | Uint8Array): string[] {
  const values = take(column, text);
  if (values.kind !== 'texts') throw new Error(values.kind);
  expect(new Set(values.texts).size).toBe(values.texts.length);
  return Array.from(values.ids, (id) => values.texts[id]);
}

function steps(column: string, text: string, step: number): number[] {
  const values = take(column, text, step);
  if (values.kind !== 'quantised') throw new Error(values.kind);
  return Array.from(values.integers);
}

describe('csv:COLUMN', () => {
  // RFC 4180 (Shafranovich 2005), section 2, rules 5 to 7: its own lines under a header.
  test('reads quoted cells with line ends, commas and doubled quotes', () => {
    const text = 'x,y,z\r\n"aaa","b\r\nbb","ccc"\r\nzzz,yyy,xxx\r\n"aaa","b""bb","ccc"\r\n';
    expect(cells('y', text)).toEqual(['b\r\nbb', 'yyy', 'b"bb']);
    expect(cells('z', text)).toEqual(['ccc', 'xxx', 'ccc']);
  });

  test('gives back every cell of a table', () => {
    const cell = fc.string({ unit: 'binary', maxLength: 5 }).filter((t) => t.isWellFormed());
    fc.assert(
      fc.property(fc.array(fc.tuple(cell, cell), { maxLength: 10 }), (rows) => {
        const quoted = (t: string) => `"${t.replaceAll('"', '""')}"`;
        const text = [['a', 'b'], ...rows].map((row) => row.map(quoted).join(',')).join('\n');
        expect(cells('a', text)).toEqual(rows.map((row) => row[0]));
        expect(cells('b', text)).toEqual(rows.map((row) => row[1]));
      }),
    );
  });

  test('a mark of byte order, a last line without an end and blank lines do not matter', () => {
    expect(cells('a', '\ufeffa,b\n1,2\n\n3,4')).toEqual(['1', '3']);
    // In a table of one column a blank line is an empty cell.
    expect(cells('a', 'a\n1\n\n3\n')).toEqual(['1', '', '3']);
  });

  test('a column that is not there: lists what is, with the nearest', () => {
    expect(() => take('lattitude', 'time,latitude,longitude\n1,2,3\n')).toThrow(
      expect.objectContaining({
        name: 'InputError',
        message: expect.stringContaining('positions.csv has no column named "lattitude"'),
        where: expect.objectContaining({
          expected: 'one of the columns time, latitude, longitude',
          advice: 'Did you mean csv:latitude?',
        }),
      }),
    );
  });

  test('another separator is pointed out', () => {
    expect(() => take('speed', 'time;speed;course\n1;2;3\n')).toThrow(
      expect.objectContaining({
        where: expect.objectContaining({ advice: expect.stringContaining('";"') }),
      }),
    );
  });

  test('a name that stands twice is refused', () => {
    expect(() => take('a', 'a,b,a\n1,2,3\n')).toThrow(/two columns named "a"/);
  });

  test.each([
    ['a,b\n1,2\n3\n', 'row 2', /^1$/],
    ['a,b\n1,2\n3,4,5\n', 'row 2', /^3$/],
    ['a,b\n1,2\n3,4\n5,"6\n', 'row 3', /./],
    ['a,b\n1,2"\n', 'row 1', /./],
    ['a,"b"c\n1,2\n', 'the header', /./],
  ])('%j is not well-formed', (text, place, got) => {
    expect(() => take('a', text)).toThrow(
      expect.objectContaining({
        name: 'InputError',
        message: `${place} of positions.csv is not well-formed as comma-separated values`,
        where: expect.objectContaining({ file: 'positions.csv', got: expect.stringMatching(got) }),
      }),
    );
  });

  test('any line end will do, also mixed', () => {
    expect(cells('b', 'a,b\r1,x\r2,y\r')).toEqual(['x', 'y']);
    expect(cells('b', 'a,b\r\n1,x\n2,"y\r"\r3,z')).toEqual(['x', 'y\r', 'z']);
  });

  test('bytes that are not UTF-8 name their offset', () => {
    expect(() => take('a', Uint8Array.of(0x61, 0x0a, 0x31, 0xe9, 0x0a))).toThrow(
      expect.objectContaining({ where: expect.objectContaining({ byteOffset: 3 }) }),
    );
  });
});

describe('csv:COLUMN with a step', () => {
  test('takes the nearest multiple, halves upwards', () => {
    expect(steps('t', 't\n0.3\n0.5\n-0.5\n-1.4\n 2e1 \n+3.\n.6\n', 1)).toEqual([
      0, 1, 0, -1, 20, 3, 1,
    ]);
    expect(steps('t', 't\n-18.5\n-18.4\n', 0.1)).toEqual([-185, -184]);
    expect(Object.is(steps('t', 't\n-0.2\n', 1)[0], 0)).toBe(true);
  });

  test('is within half a step of each value', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: -1_000_000, max: 1_000_000 }), { minLength: 1 }),
        fc.constantFrom(0.25, 0.5, 1, 8),
        (thousandths, step) => {
          const found = steps('t', `t\n${thousandths.map((v) => v / 1000).join('\n')}\n`, step);
          found.forEach((integer, i) => {
            expect(Math.abs(integer * step - thousandths[i] / 1000)).toBeLessThanOrEqual(step / 2);
          });
        },
      ),
    );
  });

  test.each(['', 'n/a', '0x10', '1,5', 'Infinity', '1e300'])('the cell %j is refused', (cell) => {
    expect(() => steps('t', `t,u\n1,1\n"${cell}",1\n`, 1)).toThrow(
      expect.objectContaining({
        name: 'InputError',
        message: expect.stringContaining('row 2 of the column t of positions.csv'),
        where: expect.objectContaining({ got: JSON.stringify(cell) }),
      }),
    );
  });
});

describe('csvWindows', () => {
  test('cut between rows only, lose nothing, and keep to the size', () => {
    const cell = fc.string({ unit: fc.constantFrom('a', '"', ',', '\n', '\r', '1'), maxLength: 6 });
    const rows = fc.array(fc.tuple(cell, cell), { maxLength: 12 });
    const end = fc.constantFrom('\n', '\r\n', '\r');
    fc.assert(
      fc.property(rows, end, fc.integer({ min: 1, max: 30 }), (table, lineEnd, least) => {
        const quoted = (t: string) => `"${t.replaceAll('"', '""')}"`;
        const written = table.map((row) => row.map(quoted).join(',') + lineEnd);
        const text = written.join('');
        const windows = [...csvWindows(Buffer.from(text), least)].map((w) => Buffer.from(w));
        expect(Buffer.concat(windows).toString()).toBe(text);
        const ends = new Set<number>([0]);
        let at = 0;
        for (const row of written) {
          at += row.length;
          ends.add(at);
        }
        at = 0;
        windows.forEach((window, i) => {
          at += window.length;
          expect(ends.has(at)).toBe(true);
          if (i < windows.length - 1) expect(window.length).toBeGreaterThanOrEqual(least);
        });
      }),
    );
  });

  test('a table of many windows is read as one', () => {
    const count = 500_000;
    const row = (i: number) => (i % 5 === 0 ? `"${i % 7},\n",x` : `${i % 7},x`);
    const text = ['a,b', ...Array.from({ length: count }, (_, i) => row(i))].join('\n');
    expect(text.length).toBeGreaterThan(2 * 2 ** 20);
    const values = take('a', text);
    if (values.kind !== 'texts') throw new Error(values.kind);
    expect(values.ids).toHaveLength(count);
    const wrong = values.ids.findIndex(
      (id, i) => values.texts[id] !== (i % 5 === 0 ? `${i % 7},\n` : `${i % 7}`),
    );
    expect(wrong).toBe(-1);
  });
});
