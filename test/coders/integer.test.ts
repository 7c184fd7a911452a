import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Setup } from '../../src/coders/contract.ts';
import { expGolombFamily } from '../../src/coders/exp-golomb.ts';
import { golombFamily } from '../../src/coders/golomb.ts';
import { SymbolCounts } from '../../src/coders/huffman-counts.ts';
import type { IntegerFamily } from '../../src/coders/integer-family.ts';
import { riceFamily } from '../../src/coders/rice.ts';
import { CorruptStreamError, InputError } from '../../src/errors/errors.ts';
import { oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';
import { decode, encode, inputOf, train, unitOf } from '../conformance/cells.ts';
import { sequences } from '../conformance/sequences.ts';

const families = [riceFamily, golombFamily, expGolombFamily];

/** Word lengths written out from the definitions, without the coders' shortcuts. */
const lengths: Record<string, (v: number, parameter: number) => number> = {
  rice: (v, k) => Math.floor(v / 2 ** k) + 1 + k,
  golomb(v, m) {
    const bits = Math.ceil(Math.log2(m));
    return Math.floor(v / m) + 1 + (v % m < 2 ** bits - m ? bits - 1 : bits);
  },
  'exp-golomb': (v, k) => 2 * Math.floor(Math.log2(v + 2 ** k)) + 1 - k,
};

const setupOf = (over: Partial<Setup>): Setup => ({
  policy: 'none',
  alphabetSize: 256,
  reset: 'message',
  lengths: 'known',
  align: 1,
  ...over,
});

function countsOf(symbols: readonly number[], alphabetSize: number): SymbolCounts {
  const counts = new SymbolCounts(alphabetSize);
  counts.add(Uint16Array.from(symbols), 0, symbols.length);
  return counts;
}

function costOf(family: IntegerFamily, symbols: Iterable<number>, parameter: number): number {
  let bits = 0;
  for (const symbol of symbols) bits += lengths[family.name](symbol, parameter);
  return bits;
}

/** Each parameter in turn; the last of the cheapest. */
function bestByTrial(family: IntegerFamily, symbols: readonly number[], alphabetSize: number) {
  let best = { parameter: -1, bits: Number.POSITIVE_INFINITY };
  for (let p = family.least; p <= family.greatestUseful(alphabetSize); p++) {
    const bits = costOf(family, symbols, p);
    if (bits <= best.bits) best = { parameter: p, bits };
  }
  return best;
}

describe.each(families.map((family) => [family.name, family] as const))('%s', (name, family) => {
  const greatest = (m: number) => family.greatestUseful(m);

  it('chooses the parameter that a trial of all finds', () => {
    const chooser = family.chooser();
    const cases = fc
      .constantFrom(1, 2, 3, 7, 256, 600)
      .chain((m) =>
        fc.tuple(
          fc.constant(m),
          fc.array(
            fc.oneof(
              fc.nat({ max: m - 1 }),
              fc.nat({ max: Math.min(m - 1, 9) }),
              fc.constant(m - 1),
            ),
            { maxLength: 30 },
          ),
        ),
      );
    fc.assert(
      fc.property(cases, ([m, symbols]) => {
        expect(chooser.choose(countsOf(symbols, m))).toEqual(bestByTrial(family, symbols, m));
      }),
      { seed: 21, numRuns: 300 },
    );
  });

  it('no parameter beyond the greatest useful one is better', () => {
    for (const m of [1, 2, 3, 5, 16, 17, 256]) {
      for (let symbol = 0; symbol < m; symbol++) {
        const own = costOf(family, [symbol], greatest(m));
        for (let p = greatest(m) + 1; p < greatest(m) + 40; p++)
          expect(costOf(family, [symbol], p)).toBeGreaterThanOrEqual(own);
      }
    }
  });

  it('without symbols takes the words of nearly one length', () => {
    for (const m of [1, 2, 256, 65_536])
      expect(family.chooser().choose(new SymbolCounts(m))).toEqual({
        parameter: greatest(m),
        bits: 0,
      });
  });

  it('the price of a given parameter is the sum of its word lengths, the fit that of the best', () => {
    const { create } = parseCandidate(`${name}:${family.key}=3`);
    fc.assert(
      fc.property(sequences(256), (sequence) => {
        const price = create().price!(sequence, setupOf({}));
        expect(price.idealBits).toBe(costOf(family, sequence.symbols, 3));
        let from = 0;
        for (const [i, end] of sequence.messageEnds.entries()) {
          const message = sequence.symbols.subarray(from, end);
          expect(price.messageIdealBits[i]).toBe(costOf(family, message, 3));
          from = end;
        }
        expect(price.fit).toEqual({
          bits: bestByTrial(family, [...sequence.symbols], 256).bits,
          of: { order: 0 },
        });
      }),
      { seed: 22, numRuns: 15 },
    );
  });

  it('sent: the best parameter of each message, or of the unit, in the fewest bits that number all', () => {
    const coder = parseCandidate(name).create();
    // Rice and exp-golomb number 0 … 8 for bytes, golomb 1 … 256.
    const tableBits = name === 'golomb' ? 8 : 4;
    fc.assert(
      fc.property(sequences(256), (sequence) => {
        const messages = [...sequence.messageEnds].map((end, i) => [
          ...sequence.symbols.subarray(i === 0 ? 0 : sequence.messageEnds[i - 1], end),
        ]);
        const full = messages.filter((message) => message.length > 0);
        const each = encode(coder, setupOf({ policy: 'sent' }), [sequence]);
        expect(each.account.tableBits).toBe(tableBits * full.length);
        expect(each.payloadBits).toBe(
          full.reduce((sum, message) => sum + bestByTrial(family, message, 256).bits, 0),
        );
        const unit = unitOf(coder, setupOf({ policy: 'sent', reset: 'never' }), sequence);
        const once = encode(coder, unit.encoderSetup, [sequence]);
        expect(once.account.tableBits).toBe(full.length > 0 ? tableBits : 0);
        expect(once.payloadBits).toBe(
          full.length === 0 ? 0 : bestByTrial(family, messages.flat(), 256).bits,
        );
        for (const setup of [setupOf({ policy: 'sent' }), unit.encoderSetup]) {
          const { messageIdealBits, idealBits } = coder.price!(sequence, setup);
          expect(messageIdealBits.reduce((a, b) => a + b, 0)).toBe(idealBits);
          expect(idealBits).toBe(setup.tables === undefined ? each.payloadBits : once.payloadBits);
        }
      }),
      { seed: 23, numRuns: 15 },
    );
  });

  it('shipped: the best parameter of the train split, whatever is coded', () => {
    const coder = parseCandidate(name).create();
    const trained = Uint8Array.from({ length: 90 }, (_, i) => 20 + (i % 13));
    const setup = setupOf({ policy: 'shipped' });
    const tables = train(coder, setup, [oneMessage(trained, 256)]);
    const { parameter } = bestByTrial(family, [...trained], 256);
    const coded = Uint8Array.of(0, 255, 17, 3);
    const { payloadBits, account } = encode(coder, { ...setup, tables }, [oneMessage(coded, 256)]);
    expect(payloadBits).toBe(costOf(family, coded, parameter));
    expect(account.tableBits).toBe(0);
    expect(coder.describeTables!(tables, setup).join(' ')).toContain(`${family.key}=${parameter}`);
  });

  it('learned adapts: a long stay at one level costs about the best fixed parameter there', () => {
    const coder = parseCandidate(name).create();
    const levels = [0, 40, 3, 200];
    const symbols = Uint8Array.from({ length: 8000 }, (_, i) => {
      const level = levels[Math.floor(i / 2000)];
      return Math.floor(level / 2) + ((i * 7919) % (level + 1));
    });
    const { payloadBits } = encode(coder, setupOf({ policy: 'learned' }), [
      oneMessage(symbols, 256),
    ]);
    let best = 0;
    for (let at = 0; at < 8000; at += 2000)
      best += bestByTrial(family, [...symbols.subarray(at, at + 2000)], 256).bits;
    const fixed = bestByTrial(family, [...symbols], 256).bits;
    // The rules assume a falling distribution and these are flat: half a bit a symbol is their share.
    expect(payloadBits).toBeLessThan(best + 0.5 * symbols.length);
    expect(payloadBits).toBeLessThan(fixed);
  });

  it('primed starts where the train split was, learned does not', () => {
    const coder = parseCandidate(name).create();
    const level = Uint16Array.from({ length: 400 }, (_, i) => (i * 31) % 9);
    const setup = setupOf({ policy: 'primed', alphabetSize: 65_536 });
    const tables = train(coder, setup, [oneMessage(level, 65_536)]);
    const message = oneMessage(level.subarray(0, 12), 65_536);
    const primed = encode(coder, { ...setup, tables }, [message]).payloadBits;
    const learned = encode(coder, { ...setup, policy: 'learned' }, [message]).payloadBits;
    // The first word of `learned` alone spends about ten bits on a remainder.
    expect(primed).toBeLessThan(learned - 6);
  });

  it('the longest word of the alphabet comes back, and one zero more is refused', () => {
    const coder = parseCandidate(`${name}:${family.key}=${family.least}`).create();
    const setup = setupOf({ alphabetSize: 65_536, lengths: 'sent', align: 8 });
    const sequence = oneMessage(Uint16Array.of(65_535, 0, 65_535), 65_536);
    const coded = encode(coder, setup, [sequence]);
    const input = inputOf(setup, coded, sequence);
    expect(decode(coder, setup, input, 3).sequence).toEqual(sequence);

    // The alphabet of one symbol less has no such word.
    const smaller = { ...setup, alphabetSize: 65_535 };
    expect(() => decode(coder, smaller, input, 3)).toThrow(CorruptStreamError);
  });

  it('a given parameter leaves no table policy, none given leaves the four', () => {
    const free = parseCandidate(name);
    const given = parseCandidate(`${name}:${family.key}=5`);
    expect(free.declaration.policies).toEqual(['shipped', 'sent', 'learned', 'primed']);
    expect(given.declaration.policies).toEqual(['none']);
    expect(given.create().trainer).toBeUndefined();
    expect(() => free.create().check!(setupOf({}))).toThrow(InputError);
    expect(() => given.create().check!(setupOf({ policy: 'sent' }))).toThrow(InputError);
    const large = setupOf({ alphabetSize: 2 ** 24 + 1 });
    expect(() => given.create().check!(large)).toThrow(/alphabet is too large/);
    given.create().check!({ ...large, alphabetSize: 2 ** 24 });
  });

  it('keeps its parameter in range', () => {
    for (const value of [family.least - 1, family.greatest + 1, 1.5])
      expect(() => parseCandidate(`${name}:${family.key}=${value}`)).toThrow(InputError);
    expect(parseCandidate(`${name}:${family.key}=${family.greatest}`).id).toBe(
      `${name}:${family.key}=${family.greatest}`,
    );
  });
});

describe('golomb', () => {
  it('finds the divisor on large alphabets, where pruning leaves few to weigh', () => {
    const chooser = golombFamily.chooser();
    for (const scale of [1, 30, 900, 20_000]) {
      const symbols = Array.from({ length: 12 }, (_, i) => (i * i * scale) % 65_536);
      const wide: SymbolSequence = oneMessage(Uint16Array.from(symbols), 65_536);
      expect(chooser.choose(countsOf([...wide.symbols], 65_536))).toEqual(
        bestByTrial(golombFamily, symbols, 65_536),
      );
    }
  });
});

describe('a sent parameter that no encoder sends', () => {
  it('is refused', () => {
    const coder = parseCandidate('rice').create();
    const setup = setupOf({ policy: 'sent' });
    // k = 15 in four bits; for bytes the greatest is 8.
    const bytes = Uint8Array.of(0xff, 0xff, 0xff);
    const input = { bytes, messageCount: 1, symbolCounts: Uint32Array.of(1) };
    expect(() => decode(coder, setup, input, 1)).toThrow(/k that is never sent/);
  });
});
