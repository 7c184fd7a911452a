import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BugError, CorruptStreamError, InputError } from '../../src/errors/errors.ts';
import {
  newSymbolArray,
  oneMessage,
  type SymbolChunk,
  type SymbolSequence,
} from '../../src/symbols/sequence.ts';
import { parseTransformChain } from '../../src/transforms/chain.ts';
import type { TransformPass } from '../../src/transforms/transform.ts';
import { chunksOf, degenerateSequences, sequences } from '../conformance/sequences.ts';

const ALPHABETS = [1, 2, 3, 256, 65_536];
const CHAINS = [
  'delta',
  'delta2',
  'lag1',
  'lag24',
  'lag4000',
  'zigzag',
  'xor',
  'xor5',
  'byte-planes',
  'bit-planes',
  'delta.zigzag',
  'lag3.delta.zigzag',
  'byte-planes.delta2.bit-planes.xor',
];

/** The chunks that a pass makes, joined. */
function joined(pass: TransformPass, chunks: readonly SymbolChunk[], alphabetSize: number) {
  const symbols: number[] = [];
  const messageEnds: number[] = [];
  for (const chunk of chunks) {
    const out = pass.push(chunk);
    expect(out.alphabetSize).toBe(alphabetSize);
    for (const end of out.messageEnds) messageEnds.push(symbols.length + end);
    for (const symbol of out.symbols) symbols.push(symbol);
  }
  pass.finish();
  return { symbols, messageEnds };
}

function plain(sequence: SymbolSequence) {
  return { symbols: [...sequence.symbols], messageEnds: [...sequence.messageEnds] };
}

function asSequence({ symbols, messageEnds }: ReturnType<typeof plain>, alphabetSize: number) {
  const array = newSymbolArray(alphabetSize, symbols.length);
  array.set(symbols);
  return { alphabetSize, symbols: array, messageEnds: Uint32Array.from(messageEnds) };
}

function takes(chain: string, alphabetSize: number): boolean {
  try {
    parseTransformChain(chain).shape(alphabetSize);
    return true;
  } catch (error) {
    expect(error).toBeInstanceOf(InputError);
    return false;
  }
}

describe('every chain', () => {
  for (const text of CHAINS) {
    const chain = parseTransformChain(text);
    const alphabets = [...ALPHABETS, 257, 2 ** 24 + 1, 2 ** 32].filter((m) => takes(text, m));

    it(`${text} comes back on m = ${alphabets.join(', ')}, cut anyhow, messages or running on`, () => {
      expect(alphabets.length).toBeGreaterThan(2);
      for (const alphabetSize of alphabets) {
        const { symbolsPerSymbol, alphabetSize: after } = chain.shape(alphabetSize);
        const cuts = fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { maxLength: 5 });
        const check = (
          sequence: SymbolSequence,
          shares: readonly number[],
          runsOn: boolean,
          emptiesLater: boolean,
        ) => {
          const before = sequence.symbols.slice();
          const places = shares.map((share) => Math.floor(share * sequence.symbols.length));
          const chunks = chunksOf(sequence, places, emptiesLater);
          const out = joined(chain.forward(alphabetSize, runsOn), chunks, after);
          expect(sequence.symbols).toEqual(before);
          expect(out).toEqual(plain(chain.forward(alphabetSize, runsOn).push(sequence)));
          expect(out.messageEnds).toEqual(
            [...sequence.messageEnds].map((end) => end * symbolsPerSymbol),
          );
          const coded = asSequence(out, after);
          // Typed arrays drop what does not fit: a symbol out of range would show as another one.
          expect(out.symbols.every((symbol) => symbol < after)).toBe(true);
          const codedPlaces = shares.map((share) => Math.floor(share * coded.symbols.length));
          const back = joined(
            chain.inverse(alphabetSize, runsOn),
            chunksOf(coded, codedPlaces, emptiesLater),
            alphabetSize,
          );
          expect(back).toEqual(plain(sequence));
        };
        for (const [, sequence] of degenerateSequences(alphabetSize)) {
          check(sequence, [0.4], false, false);
          check(sequence, [], true, false);
        }
        fc.assert(fc.property(sequences(alphabetSize), cuts, fc.boolean(), fc.boolean(), check), {
          seed: 5,
          numRuns: 12,
        });
      }
    });
  }
});

/** What each step gives for one message, written from its definition, without state. */
const definitions: Record<string, (x: number[], m: number) => number[]> = {
  delta: (x, m) => x.map((v, i) => (v - (x[i - 1] ?? 0) + m) % m),
  delta2: (x, m) => x.map((v, i) => (v - 2 * (x[i - 1] ?? 0) + (x[i - 2] ?? 0) + 2 * m) % m),
  lag7: (x, m) => x.map((v, i) => (v - (x[i - 7] ?? 0) + m) % m),
  zigzag: (x, m) => {
    // All signed residues in order of size, the negative one of a pair first.
    const order = Array.from({ length: m }, (_, r) => (r < m / 2 ? r : r - m));
    order.sort((a, b) => Math.abs(a) - Math.abs(b) || a - b);
    return x.map((v) => order.findIndex((signed) => (signed + m) % m === v));
  },
  xor: (x) => x.map((v, i) => v ^ (x[i - 1] ?? 0)),
  xor3: (x) => x.map((v, i) => v ^ (x[i - 3] ?? 0)),
  'byte-planes': (x) => [...x.map((v) => Math.floor(v / 256)), ...x.map((v) => v % 256)],
  'bit-planes': (x, m) =>
    Array.from({ length: Math.ceil(Math.log2(m)) }, (_, plane) => plane)
      .reverse()
      .flatMap((plane) => x.map((v) => Math.floor(v / 2 ** plane) % 2)),
};

describe('each step is what it says', () => {
  const alphabetsOf = (name: string) => {
    if (name === 'byte-planes') return [300, 65_536];
    return name.startsWith('xor') ? [2, 16, 256] : [2, 3, 5, 16, 256];
  };
  for (const [name, definition] of Object.entries(definitions)) {
    it(`${name}`, () => {
      for (const m of alphabetsOf(name)) {
        const message = fc.array(fc.nat({ max: m - 1 }), { maxLength: 40 });
        fc.assert(
          fc.property(fc.array(message, { maxLength: 4 }), (messages) => {
            const ends = messages.map((_, i) => messages.slice(0, i + 1).flat().length);
            const sequence = asSequence({ symbols: messages.flat(), messageEnds: ends }, m);
            const { symbols } = parseTransformChain(name).forward(m, false).push(sequence);
            expect([...symbols]).toEqual(messages.flatMap((x) => definition(x, m)));
            if (name.endsWith('planes')) return;
            const running = parseTransformChain(name).forward(m, true).push(sequence);
            expect([...running.symbols]).toEqual(definition(messages.flat(), m));
          }),
          { seed: 6, numRuns: 20 },
        );
      }
    });
  }

  it('delta2 is delta.delta', () => {
    fc.assert(
      fc.property(sequences(65_536), fc.boolean(), (sequence, runsOn) => {
        const [once, twice] = ['delta2', 'delta.delta'].map((text) =>
          parseTransformChain(text).forward(65_536, runsOn).push(sequence),
        );
        expect(once).toEqual(twice);
      }),
      { seed: 7, numRuns: 30 },
    );
  });

  it('a chain is read left to right', () => {
    const sequence = oneMessage(Uint8Array.of(10, 9, 11, 11), 256);
    const forward = (text: string) => [
      ...parseTransformChain(text).forward(256, false).push(sequence).symbols,
    ];
    // 10, −1, 2, 0
    expect(forward('delta.zigzag')).toEqual([20, 1, 4, 0]);
    // 20, 18, 22, 22
    expect(forward('zigzag.delta')).toEqual([20, 254, 4, 0]);
  });
});

describe('a chain that cannot be', () => {
  it.each([
    ['dleta', /delta/],
    ['zig-zag', /zigzag/],
    ['byteplanes', /byte-planes/],
    ['delta.', /there is no step/],
    ['', /there is no step/],
    ['lag', /lagN with N from 1 to 65536/],
    ['lag0', /lagN with N from 1/],
    ['lag65537', /to 65536/],
    ['xor0', /xorN with N from 1/],
    ['delta3', /delta2/],
  ])('%j is refused with a hint', (text, hint) => {
    const error = caught(() => parseTransformChain(text));
    expect(error).toBeInstanceOf(InputError);
    const { key, advice, expected } = (error as InputError).where;
    expect(key).toBe('after');
    expect(`${(error as InputError).message} ${advice} ${expected}`).toMatch(hint);
  });

  it.each([
    ['xor', 3],
    ['xor7', 29_393],
    ['byte-planes', 256],
    ['byte-planes.byte-planes', 65_536],
    ['bit-planes.byte-planes', 65_536],
  ])('%s does not take m = %d', (text, alphabetSize) => {
    expect(() => parseTransformChain(text).shape(alphabetSize)).toThrow(InputError);
  });

  it('the longest look back is taken', () => {
    expect(parseTransformChain('lag65536.xor65536').name).toBe('lag65536.xor65536');
  });
});

describe('an inverse refuses what no chain gives', () => {
  it.each([
    ['byte-planes', 65_536, [1, 2, 3], 256],
    ['byte-planes', 300, [1, 44], 256],
    ['bit-planes', 3, [1, 1], 2],
    ['bit-planes', 1, [1], 2],
    ['bit-planes', 256, [0, 0, 0, 0, 0, 0, 0], 2],
  ])('%s of m = %d: %j', (text, alphabetSize, symbols, after) => {
    const sequence = oneMessage(Uint8Array.from(symbols), after);
    const pass = parseTransformChain(text).inverse(alphabetSize, false);
    expect(() => pass.push(sequence)).toThrow(CorruptStreamError);
  });

  it('300 is the first symbol outside of m = 300', () => {
    const pass = parseTransformChain('byte-planes').inverse(300, false);
    expect([...pass.push(oneMessage(Uint8Array.of(1, 43), 256)).symbols]).toEqual([299]);
  });
});

describe('planes keep an open message back', () => {
  const part = { alphabetSize: 256, symbols: Uint8Array.of(1, 2), messageEnds: Uint32Array.of() };

  it('and refuse to finish within it', () => {
    const pass = parseTransformChain('bit-planes').forward(256, false);
    expect(pass.push({ ...part, openSymbolCount: 3 }).symbols.length).toBe(0);
    expect(() => pass.finish()).toThrow(BugError);
  });

  it('and refuse another length than it said', () => {
    const longer = parseTransformChain('bit-planes').forward(256, false);
    longer.push({ ...part, openSymbolCount: 3 });
    expect(() => longer.push({ ...part, openSymbolCount: 3 })).toThrow(BugError);
    const shorter = parseTransformChain('bit-planes').forward(256, false);
    shorter.push({ ...part, openSymbolCount: 5 });
    expect(() => shorter.push({ ...part, messageEnds: Uint32Array.of(2) })).toThrow(BugError);
    expect(() => parseTransformChain('bit-planes').forward(256, false).push(part)).toThrow(
      BugError,
    );
  });
});

function caught(action: () => unknown): unknown {
  try {
    action();
  } catch (error) {
    return error;
  }
  throw new Error('nothing was thrown');
}
