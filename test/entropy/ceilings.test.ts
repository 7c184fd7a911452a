import { describe, expect, it } from 'vitest';
import type { Coder, Decoded } from '../../src/coders/contract.ts';
import {
  adaptiveCeilings,
  CeilingStop,
  LARGEST_CEILING_BYTES,
} from '../../src/entropy/ceilings.ts';
import { CorruptStreamError, LimitError } from '../../src/errors/errors.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';
import { addOneCoder } from './stand-in-coder.ts';

const input = {
  alphabetSize: 5,
  symbols: Uint8Array.from({ length: 1000 }, (_, i) => (i * i) % 5),
  messageEnds: Uint32Array.of(400, 400, 1000),
};

/** A coder whose decoder spoils what it decoded. */
function spoiling(spoil: (sequence: Decoded['sequence']) => void): Coder {
  const coder = addOneCoder(0);
  return {
    ...coder,
    decoder: (setup, limits) => ({
      decode: (coded) => {
        const decoded = coder.decoder(setup, limits).decode(coded);
        spoil(decoded.sequence);
        return decoded;
      },
    }),
  };
}

describe('adaptiveCeilings', () => {
  it('lists an equal-length code and each order that decoded', () => {
    const steps: number[] = [];
    const { ceilings, without } = adaptiveCeilings(input, {
      upto: 1,
      coderOf: addOneCoder,
      progress: (done) => steps.push(done),
    });
    // The stand-in writes ⌈log2 5⌉ = 3 bits a symbol, whatever its order.
    expect(ceilings).toEqual([
      { name: 'fixed', bitsPerSymbol: 3 },
      { name: 'arith:order=0', bitsPerSymbol: 3 },
      { name: 'arith:order=1', bitsPerSymbol: 3 },
    ]);
    expect(without).toEqual([]);
    expect(steps).toEqual([1, 2]);
  });

  it('gives no ceiling to a decoder that errs in a symbol or in a message end', () => {
    const faults = [
      spoiling(({ symbols }) => {
        symbols[999] = (symbols[999] + 1) % 5;
      }),
      spoiling(({ messageEnds }) => {
        messageEnds[1] = 401;
      }),
    ];
    const { ceilings, without } = adaptiveCeilings(input, {
      upto: 2,
      coderOf: (order) => faults[order] ?? addOneCoder(order),
    });
    expect(ceilings.map((c) => c.name)).toEqual(['fixed', 'arith:order=2']);
    expect(without.map((w) => w.name)).toEqual(['arith:order=0', 'arith:order=1']);
    for (const { error } of without) expect(error).toBeInstanceOf(CorruptStreamError);
    expect(without[0].error!.where.symbolIndex).toBe(999);
    expect(without[1].error!.where.messageIndex).toBe(1);
  });

  it('goes on after a limit, and not after a fault of another kind', () => {
    const limited = (order: number): Coder => {
      if (order === 1) throw new LimitError('too many contexts');
      return addOneCoder(order);
    };
    const { ceilings, without } = adaptiveCeilings(input, { upto: 2, coderOf: limited });
    expect(ceilings.map((c) => c.name)).toEqual(['fixed', 'arith:order=0', 'arith:order=2']);
    expect(without.map((w) => [w.name, w.reason])).toEqual([
      ['arith:order=1', 'too many contexts'],
    ]);
    const faulty = () => {
      throw new TypeError('broken');
    };
    expect(() => adaptiveCeilings(input, { coderOf: faulty })).toThrow(TypeError);
  });

  it('stops after two orders in a row that need more than what is reached, and says so', () => {
    const run: number[] = [];
    const noting = (order: number): Coder => {
      run.push(order);
      return addOneCoder(0);
    };
    // The stand-in needs 3 bits whatever its order; 2.5 are reached already.
    const { ceilings, without } = adaptiveCeilings(input, { best: 2.5, coderOf: noting });
    expect(run).toEqual([0, 1]);
    expect(ceilings).toHaveLength(3);
    expect(without.map((w) => w.name)).toEqual(['arith:order=2', 'arith:order=3', 'arith:order=4']);
    expect(without[0].reason).toBe(
      'not run: arith:order=0 and arith:order=1 need more bits than what is reached already',
    );
  });

  it('asks for nothing where there are no symbols', () => {
    const empty = oneMessage(new Uint8Array(0), 1);
    expect(adaptiveCeilings(empty, { coderOf: addOneCoder })).toEqual({
      ceilings: [{ name: 'fixed', bitsPerSymbol: 0 }],
      without: [],
    });
  });

  it('codes only the orders asked for', () => {
    const { ceilings } = adaptiveCeilings(input, { from: 2, upto: 3, coderOf: addOneCoder });
    expect(ceilings.map((c) => c.name)).toEqual(['fixed', 'arith:order=2', 'arith:order=3']);
  });

  it('refuses one byte more than the largest sequence, before it codes anything', () => {
    const tooLarge = oneMessage(new Uint8Array(LARGEST_CEILING_BYTES + 1), 2);
    const unused = (): Coder => ({ ...addOneCoder(0), encoder: () => expect.fail() });
    const { ceilings, without } = adaptiveCeilings(tooLarge, { upto: 0, coderOf: unused });
    expect(ceilings).toHaveLength(1);
    expect(without[0].error).toBeInstanceOf(LimitError);
    const reached: number[] = [];
    const noting = (): Coder => ({
      ...addOneCoder(0),
      encoder: () => {
        reached.push(1);
        throw new LimitError('far enough');
      },
    });
    for (const size of [LARGEST_CEILING_BYTES, LARGEST_CEILING_BYTES - 1]) {
      adaptiveCeilings(oneMessage(tooLarge.symbols.subarray(0, size), 2), {
        upto: 0,
        coderOf: noting,
      });
    }
    expect(reached).toEqual([1, 1]);
  });

  it('lies between the entropy of the source and a little more, with the coder it takes by itself', () => {
    // A fair four-sided source: 2 bits a symbol is its entropy rate, and learning m = 4 frequencies of order 0 costs at
    // most some (m − 1)/2 · log2 n + escapes, far below 100 bits (Rissanen 1984).
    const generator = new SeededGenerator(8);
    const symbols = Uint8Array.from({ length: 20_000 }, () => generator.integer(0, 3));
    const { ceilings, without } = adaptiveCeilings(oneMessage(symbols, 4), { upto: 1 });
    expect(without).toEqual([]);
    const zero = ceilings.find((c) => c.name === 'arith:order=0')!.bitsPerSymbol;
    // The draw's own plug-in entropy lies within 0.002 of 2: five times (m − 1)/(2n ln 2), and its spread.
    expect(zero).toBeGreaterThan(2 - 0.002);
    expect(zero).toBeLessThan(2 + 100 / 20_000);
  });
});

describe('CeilingStop', () => {
  it('wants two lost orders in a row', () => {
    const stop = new CeilingStop(8);
    const rates = [7, 6, 6.5, 5.9, 6, 6.1];
    const stopped = rates.map((bitsPerSymbol, order) => {
      stop.note({ name: `order ${order}`, bitsPerSymbol });
      return stop.reason !== undefined;
    });
    expect(stopped).toEqual([false, false, false, false, false, true]);
    expect(stop.reason).toMatch(/order 4 and order 5 need more bits/);
  });

  it('goes on where a rate is only equalled', () => {
    const stop = new CeilingStop(8);
    for (let order = 0; order < 5; order++) stop.note({ name: '', bitsPerSymbol: 8 });
    expect(stop.reason).toBeUndefined();
  });
});
