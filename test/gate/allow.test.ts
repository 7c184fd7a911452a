import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import { allowOf, growthText, isWithin, parseAllow } from '../../src/gate/allow.ts';

describe('what is allowed', () => {
  it.each([
    // 0.5 % of 2000 is 10; of 1999 it is 9.995.
    [2000, 2009, '0.5%', true],
    [2000, 2010, '0.5%', true],
    [2000, 2011, '0.5%', false],
    [1999, 2008, '0.5%', true],
    [1999, 2009, '0.5%', false],
    // 0.1 % of 3000 is 3, which 3000 × 0.001 in doubles may miss.
    [3000, 3003, '0.1%', true],
    [3000, 3004, '0.1%', false],
    [2000, 2007, 8, true],
    [2000, 2008, 8, true],
    [2000, 2009, 8, false],
    [0, 0, 0, true],
    [0, 1, 0, false],
    [0, 1, '100%', false],
    [7, 14, '100%', true],
    [7, 15, '100%', false],
    [9, 3, 0, true],
  ])('%i to %i with %s: %s', (was, now, allowed, within) => {
    expect(isWithin(was, now, allowed)).toBe(within);
  });

  it('is exact for any percentage of two decimals and any count of bits', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 2 ** 40 }),
        fc.integer({ min: 0, max: 99_999 }),
        (was, hundredths) => {
          const allowed = `${Math.floor(hundredths / 100)}.${String(hundredths % 100).padStart(2, '0')}%`;
          // The most that is allowed, in whole numbers.
          const most = Number((BigInt(was) * BigInt(hundredths)) / 10_000n);
          expect(isWithin(was, was + most, allowed)).toBe(true);
          expect(isWithin(was, was + most + 1, allowed)).toBe(false);
        },
      ),
    );
  });

  it('is nothing where the plan says nothing', () => {
    expect(allowOf(undefined)).toEqual({ total: 0, each_file: 0 });
    expect(allowOf({ allow: { each_file: '0.5%' } })).toEqual({ total: 0, each_file: '0.5%' });
  });

  it('is read from an option, which leaves the plan what it does not name', () => {
    const plan = { total: 1, each_file: '2%' };
    expect(parseAllow('0.5%', plan)).toEqual({ total: '0.5%', each_file: '0.5%' });
    expect(parseAllow('8', plan)).toEqual({ total: 8, each_file: 8 });
    expect(parseAllow('total=3', plan)).toEqual({ total: 3, each_file: '2%' });
    expect(parseAllow('each_file=1.5%,total=0', plan)).toEqual({ total: 0, each_file: '1.5%' });
    for (const text of ['', 'x', '-1', '5 %', 'total', 'all=3', 'total=', 'total=1,', '1e3']) {
      expect(() => parseAllow(text, plan), text).toThrow(InputError);
    }
  });

  it('is said in words', () => {
    expect([0, 1, 8, '0.5%'].map(growthText)).toEqual(['nothing', '1 bit', '8 bits', '0.5 %']);
  });
});
