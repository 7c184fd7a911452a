/** The trade-off front and break-even points against brute force written from their definitions. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { type Objective, tradeOffFront } from '../../src/compare/front.ts';
import { breakEvens, yearlyCost } from '../../src/compare/yearly-cost.ts';
import type { CellRecord } from '../../src/harness/run-record.ts';

/** Small whole numbers, so that ties and duplicates are common. */
const figures = fc.array(
  fc.tuple(
    fc.integer({ min: 0, max: 5 }),
    fc.integer({ min: 0, max: 5 }),
    fc.option(fc.integer({ min: 0, max: 5 }), { nil: undefined }),
  ),
  { minLength: 1, maxLength: 12 },
);

const objectivesOf = (rows: [number, number, number | undefined][]): Objective[] => [
  { name: 'rate', better: 'less', values: rows.map(([rate]) => rate) },
  { name: 'speed', better: 'more', values: rows.map(([, speed]) => speed) },
  { name: 'flash', better: 'less', values: rows.map(([, , flash]) => flash) },
];

describe('the trade-off front', () => {
  it('is every alternative that no other beats, by the definition', () => {
    fc.assert(
      fc.property(figures, (rows) => {
        // x beats y: nowhere worse, somewhere better; no figure is worse than any figure.
        const atLeast = (x: number | undefined, y: number | undefined) =>
          y === undefined || (x !== undefined && x <= y);
        const beats = (x: (typeof rows)[number], y: (typeof rows)[number]) => {
          const pairs = [atLeast(x[0], y[0]), x[1] >= y[1], atLeast(x[2], y[2])];
          const back = [atLeast(y[0], x[0]), y[1] >= x[1], atLeast(y[2], x[2])];
          return pairs.every(Boolean) && !back.every(Boolean);
        };
        const front = tradeOffFront(rows.length, objectivesOf(rows));
        const expected = rows.flatMap((y, i) => (rows.some((x) => beats(x, y)) ? [] : [i]));
        expect(front.members).toEqual(expected);
        front.dominatedBy.forEach((by, i) => {
          if (expected.includes(i)) expect(by).toBe(-1);
          else expect(beats(rows[by], rows[i])).toBe(true);
        });
      }),
    );
  });
});

describe('break-even points', () => {
  it('are all pairs in which what costs less to send takes more memory, by the definition', () => {
    const cells = fc.uniqueArray(
      fc.record({
        id: fc.string({ minLength: 1, maxLength: 4 }),
        cost: fc.integer({ min: 0, max: 6 }),
        flashBytes: fc.integer({ min: 0, max: 3 }),
        ramBytes: fc.integer({ min: 0, max: 3 }),
      }),
      { selector: (c) => c.id, maxLength: 8 },
    );
    fc.assert(
      fc.property(cells, fc.integer({ min: 1, max: 9 }), (own, devices) => {
        const expected = new Map<string, number>();
        for (const a of own) {
          for (const b of own) {
            const cheaper = a.cost < b.cost;
            const larger = a.flashBytes > b.flashBytes || a.ramBytes > b.ramBytes;
            if (cheaper && larger)
              expected.set(JSON.stringify([a.id, b.id]), (b.cost - a.cost) / devices);
          }
        }
        const found = breakEvens(own, devices);
        expect(found.length).toBe(expected.size);
        for (const pair of found) {
          const key = JSON.stringify([pair.cheaper, pair.smaller]);
          expect(pair.savedPerDeviceYear).toBe(expected.get(key));
        }
      }),
    );
  });

  it('put a price on a year by hand', () => {
    // 24 bytes a message, 10 messages a day, 100 devices, 365 days: 8.76 million bytes at 5 a million.
    const cell = { carried_bits: 24 * 8 * 50, message_count: 50 } as CellRecord;
    const terms = { price_per_megabyte: 5, units_per_day: 10, devices: 100 };
    const cost = yearlyCost(cell, terms)!;
    expect(cost.bytes).toBeCloseTo(8_760_000, 6);
    expect(cost.cost).toBeCloseTo(43.8, 9);
    // Billed in steps of 32 bytes, one a message.
    const billed = {
      ...cell,
      billing: { step_bytes: 32, steps: 50, steps_per_unit: 1, unused_share: 0.25 },
    } as CellRecord;
    expect(yearlyCost(billed, terms)!.bytes).toBeCloseTo(11_680_000, 6);
    expect(yearlyCost(cell, { units_per_day: 10 })).toBeUndefined();
  });
});
