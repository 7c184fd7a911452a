/**
 * Plug-in entropies given k predecessors of eleven open files, over bytes and over 16-bit symbols, in bits to six places:
 * measured outside of this program by a script of another language, over the N − k positions that have k predecessors.
 */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { ensureDatasets } from '../../scripts/datasets.mjs';
import { entropyByOrder } from '../../src/entropy/entropy-by-order.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';

const folder = await ensureDatasets();
const [head, ...rows] = readFileSync(new URL('./vectors/measured-a.tsv', import.meta.url), 'utf8')
  .trim()
  .split('\n')
  .map((line) => line.split('\t'));

const measured = rows.map((row) => {
  const value = (column: string): string => row[head.indexOf(column)];
  return {
    name: value('name'),
    distinct: Number(value('distinct')),
    byteEntropies: [0, 1, 2, 3, 4, 5].map((k) => Number(value(`H${k}`))),
    wordDistinct: value('w16_distinct'),
    wordEntropies: [0, 1, 2].map((k) => Number(value(`w16_H${k}`))),
  };
});

function expectToSixPlaces(found: readonly { plugIn: number }[], expected: readonly number[]) {
  expected.forEach((bits, k) => {
    expect(Math.abs(found[k].plugIn - bits), `order ${k}`).toBeLessThanOrEqual(0.5e-6 + 1e-12);
  });
}

it('the table lists eleven files', () => {
  expect(measured).toHaveLength(11);
});

describe.each(measured)('$name', (file) => {
  const bytes = readFileSync(join(folder, file.name));

  it('over bytes, orders 0 to 5', () => {
    const { orders } = entropyByOrder(oneMessage(new Uint8Array(bytes), 256), {
      upto: 5,
      contexts: 'running',
    });
    expect(orders[0].pairs).toBe(file.distinct);
    expectToSixPlaces(orders, file.byteEntropies);
  });

  if (file.wordDistinct !== '-') {
    it('over 16-bit symbols, orders 0 to 2', () => {
      const words = Uint16Array.from({ length: bytes.length / 2 }, (_, i) =>
        bytes.readUInt16LE(2 * i),
      );
      const { orders } = entropyByOrder(oneMessage(words, 65536), {
        upto: 2,
        contexts: 'running',
      });
      expect(orders[0].pairs).toBe(Number(file.wordDistinct));
      expectToSixPlaces(orders, file.wordEntropies);
    });
  }
});
