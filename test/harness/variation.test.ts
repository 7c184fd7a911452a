import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  codedKeyOf,
  dataKeyOf,
  dataKeyOfCell,
  isPlain,
  type Variation,
  variationOf,
  variationText,
  varyRecord,
} from '../../src/harness/variation.ts';

const variation: fc.Arbitrary<Variation> = fc.record(
  {
    align: fc.constantFrom(1, 8, 32),
    messageSymbols: fc.integer({ min: 1, max: 4096 }),
    trainShare: fc.integer({ min: 1, max: 99 }).map((percent) => percent / 100),
    fold: fc.integer({ min: 1, max: 100 }),
  },
  { requiredKeys: [] },
);

describe('a variation', () => {
  it('stands at the end of an id, in one order', () => {
    const all = { fold: 2, trainShare: 0.1, messageSymbols: 64, align: 1 };
    expect(variationText(all)).toBe('+align=1+message_symbols=64+train_share=0.1+fold=2');
    expect(variationText({})).toBe('');
    // Alignment is no part of the data, and what trains none of what is coded.
    expect(dataKeyOf('a', all)).toBe('a+message_symbols=64+train_share=0.1+fold=2');
    expect(codedKeyOf('a', all)).toBe('a+message_symbols=64+fold=2');
  });

  it('comes back from a record', () => {
    fc.assert(
      fc.property(variation, (one) => {
        const vary = varyRecord(one);
        expect(vary === undefined).toBe(variationText(one) === '');
        expect(variationOf(vary ?? {})).toEqual(one);
        const cell = { corpus: 'a', ...(vary === undefined ? {} : { vary }) };
        expect(dataKeyOfCell(cell)).toBe(dataKeyOf('a', one));
      }),
    );
  });

  it('is plain where it is none, or the first fold', () => {
    expect([{}, { fold: 1 }].map(isPlain)).toEqual([true, true]);
    const others = [{ fold: 2 }, { align: 1 }, { trainShare: 0.1, fold: 1 }, { messageSymbols: 4 }];
    expect(others.map(isPlain)).toEqual([false, false, false, false]);
  });
});
