import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import { holmAdjusted } from '../../src/statistics/holm.ts';

describe('holmAdjusted', () => {
  it('rejects exactly what the step-down procedure rejects', () => {
    // Holm 1979, §3: reject the smallest while it is at most α ÷ (how many are left), then stop.
    const shares = fc.array(
      fc.integer({ min: 0, max: 1000 }).map((v) => v / 1000),
      {
        maxLength: 12,
      },
    );
    fc.assert(
      fc.property(shares, fc.integer({ min: 1, max: 300 }), (p, thousandths) => {
        const alpha = thousandths / 1000 + 0.0003;
        const rising = [...p].sort((a, b) => a - b);
        let rejected = 0;
        while (rejected < p.length && rising[rejected] * (p.length - rejected) <= alpha) rejected++;
        const adjusted = holmAdjusted(p);
        expect([...adjusted].filter((value) => value <= alpha).length).toBe(rejected);
        p.forEach((value, i) => {
          expect(adjusted[i]).toBeGreaterThanOrEqual(value);
          expect(adjusted[i]).toBeLessThanOrEqual(1);
        });
      }),
    );
  });

  it('leaves one p-value as it is, and refuses what is none', () => {
    expect([...holmAdjusted([0.03])]).toEqual([0.03]);
    expect([...holmAdjusted([])]).toEqual([]);
    for (const p of [-0.1, 1.1, Number.NaN]) expect(() => holmAdjusted([p])).toThrow(InputError);
  });
});
