import { describe, expect, it } from 'vitest';
import type { Coder } from '../../src/coders/contract.ts';
import { usefulOrders } from '../../src/entropy/useful.ts';
import { LimitError } from '../../src/errors/errors.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';
import { addOneCoder } from './stand-in-coder.ts';

/** Symbols that repeat the one before with probability 0.9, else take the next of m. */
function stickySymbols(length: number, m: number, seed: number): Uint8Array {
  const generator = new SeededGenerator(seed);
  const symbols = new Uint8Array(length);
  for (let i = 1; i < length; i++) {
    symbols[i] = (symbols[i - 1] + (generator.real() < 0.9 ? 0 : 1)) % m;
  }
  return symbols;
}

const verdicts = (sequence: SymbolSequence, upto: number, contexts: 'message' | 'running') =>
  usefulOrders(sequence, { upto, contexts, coderOf: addOneCoder }).map((v) => v.useful);

describe('usefulOrders', () => {
  it('finds the order of the source and stops two orders later', () => {
    // A fair two-state chain: order 0 is no better than log2 2, order 1 is, higher ones cannot be.
    const input = oneMessage(stickySymbols(20_000, 2, 1), 2);
    const found = usefulOrders(input, { upto: 6, contexts: 'running', coderOf: addOneCoder });
    expect(found.map((v) => v.useful)).toEqual([
      false,
      true,
      false,
      false,
      undefined,
      undefined,
      undefined,
    ]);
    expect(found[6].reason).toBe('not tested: the two orders below are not useful');
    expect(found[1].reason).toMatch(/^0\.5\d+ bits\/symbol less than order 0 on held-out data/);
    expect(found[0].reason).toMatch(/ (more|less) than equal lengths on /);
  });

  it('finds nothing in noise', () => {
    const generator = new SeededGenerator(4);
    const noise = Uint8Array.from({ length: 8000 }, () => generator.integer(0, 15));
    expect(verdicts(oneMessage(noise, 16), 4, 'running')).toEqual([
      false,
      false,
      undefined,
      undefined,
      undefined,
    ]);
  });

  it('lets no context reach over a message end where messages stand alone', () => {
    // Every second symbol repeats the one before it. Messages of two keep the pairs; messages of one part them.
    const generator = new SeededGenerator(5);
    const symbols = new Uint8Array(20_000);
    for (let i = 0; i < symbols.length; i += 2) symbols.fill(generator.integer(0, 3), i, i + 2);
    const cut = (length: number) =>
      Uint32Array.from({ length: symbols.length / length }, (_, i) => length * (i + 1));
    const inTwos = { alphabetSize: 4, symbols, messageEnds: cut(2) };
    const inOnes = { alphabetSize: 4, symbols, messageEnds: cut(1) };
    expect(verdicts(inTwos, 1, 'message')).toEqual([false, true]);
    expect(verdicts(inOnes, 1, 'message')).toEqual([false, false]);
    expect(verdicts(inOnes, 1, 'running')).toEqual([false, true]);
  });

  it('prices only the second half, by a model that saw only the first', () => {
    const symbols = stickySymbols(5001, 3, 2);
    const trained: number[] = [];
    const priced: number[] = [];
    const spy = (order: number): Coder => {
      const coder = addOneCoder(order);
      return {
        ...coder,
        trainer(setup) {
          const trainer = coder.trainer!(setup);
          return {
            ...trainer,
            push: (chunk) => {
              trained.push(...chunk.symbols);
              trainer.push(chunk);
            },
          };
        },
        price(sequence, setup) {
          priced.push(...sequence.symbols);
          return coder.price!(sequence, setup);
        },
      };
    };
    usefulOrders(oneMessage(symbols, 3), { upto: 0, contexts: 'message', coderOf: spy });
    expect(trained).toEqual([...symbols.subarray(0, 2500)]);
    expect(priced).toEqual([...symbols.subarray(2500)]);
  });

  it('says so where data are too few', () => {
    for (const length of [0, 1, 127]) {
      const found = usefulOrders(oneMessage(new Uint8Array(length), 2), {
        upto: 1,
        contexts: 'running',
        coderOf: addOneCoder,
      });
      expect(found).toEqual([
        { useful: undefined, reason: 'not tested: too few symbols for two halves of blocks' },
        { useful: undefined, reason: 'not tested: too few symbols for two halves of blocks' },
      ]);
    }
    expect(verdicts(oneMessage(new Uint8Array(128), 2), 0, 'running')).toEqual([true]);
  });

  it('finds nothing useful in an alphabet of one', () => {
    expect(verdicts(oneMessage(new Uint8Array(500), 1), 2, 'running')).toEqual([
      false,
      false,
      undefined,
    ]);
  });

  it('stops at an order that cannot be priced, and keeps those below', () => {
    const input = oneMessage(stickySymbols(2000, 2, 3), 2);
    const found = usefulOrders(input, {
      upto: 3,
      contexts: 'running',
      coderOf: (order) => {
        if (order === 2) throw new LimitError('too many contexts');
        return addOneCoder(order);
      },
    });
    expect(found.map((v) => v.useful)).toEqual([false, true, undefined, undefined]);
    expect(found[3].reason).toBe('not tested: order 2 cannot be priced, too many contexts');
  });

  it('does not hide a fault that is no limit', () => {
    const faulty = () => {
      throw new TypeError('broken');
    };
    expect(() =>
      usefulOrders(oneMessage(new Uint8Array(200), 2), {
        upto: 0,
        contexts: 'running',
        coderOf: faulty,
      }),
    ).toThrow(TypeError);
  });

  it('tests back-off arithmetic coding where no coder is given', () => {
    const input = oneMessage(stickySymbols(20_000, 2, 6), 2);
    const found = usefulOrders(input, { upto: 3, contexts: 'running' });
    expect(found.map((v) => v.useful)).toEqual([false, true, false, false]);
    // h(0.1) = 0.469 bits (closed form): what order 1 saves of the 1 bit that order 0 needs is about 0.531.
    expect(Number(/^[\d.]+/.exec(found[1].reason)![0])).toBeCloseTo(0.531, 1);
    expect(found[3].reason).toMatch(/ bits\/symbol (more|less) than order 2 on held-out data/);
  });
});
