import { describe, expect, it } from 'vitest';
import { parseCandidate, parseCandidates } from '../../src/coders/candidate.ts';
import type { Setup } from '../../src/coders/contract.ts';
import { InputError } from '../../src/errors/errors.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';
import { integers } from '../conformance/sequences.ts';

const RECORD = 6;
const RECORDS = 200;

const setupOf = (reset: Setup['reset']): Setup => ({
  policy: 'learned',
  alphabetSize: 16,
  reset,
  lengths: 'link',
  align: 8,
});

/** Records whose place p is uniform over the 2^(p mod 4 + 1) lowest symbols; a message each. */
function records(): SymbolSequence {
  const next = integers(5);
  const symbols = Uint8Array.from(
    { length: RECORD * RECORDS },
    (_, i) => (next() >>> 8) % 2 ** (((i % RECORD) % 4) + 1),
  );
  const messageEnds = Uint32Array.from({ length: RECORDS }, (_, i) => (i + 1) * RECORD);
  return { alphabetSize: 16, symbols, messageEnds };
}

/** Krichevsky–Trofimov code length of one context: Γ forms as rising factorials. */
function ktBits(symbols: readonly number[], m: number): number {
  const counts = new Array(m).fill(0);
  let bits = 0;
  symbols.forEach((symbol, n) => {
    bits -= Math.log2((counts[symbol]++ + 0.5) / (n + m / 2));
  });
  return bits;
}

function bytesOf(text: string, sequence: SymbolSequence, setup: Setup): Uint8Array {
  const encoder = parseCandidate(text).create().encoder(setup);
  encoder.push(sequence);
  return encoder.finish().bytes;
}

describe('arith with position', () => {
  it('needs at order 0 the sum of the KT lengths of each place of the record', () => {
    const sequence = records();
    const coder = parseCandidate(`arith:order=0,position=${RECORD},backoff=none`).create();
    const { idealBits, fit } = coder.price!(sequence, setupOf('never'));
    let expected = 0;
    for (let place = 0; place < RECORD; place++) {
      expected += ktBits(
        [...sequence.symbols].filter((_, i) => i % RECORD === place),
        16,
      );
    }
    expect(idealBits).toBeCloseTo(expected, 6);
    // No fit: the rule of orders does not judge whether the class is estimable.
    expect(fit).toBeUndefined();
  });

  it('counts from the start of each message under reset message, and runs on under never', () => {
    // Messages of 4 under a record of 6: place i mod 4 of a message, or i mod 6 of everything.
    const { symbols } = records();
    const messageEnds = Uint32Array.from({ length: symbols.length / 4 }, (_, i) => (i + 1) * 4);
    const sequence = { alphabetSize: 16, symbols, messageEnds };
    const coder = parseCandidate('arith:order=0,position=6,backoff=none').create();
    const perMessage = coder.price!(sequence, setupOf('message')).idealBits;
    // Each message alone: four places, each with one symbol, 1/16 each.
    expect(perMessage).toBeCloseTo(4 * symbols.length, 6);
    let running = 0;
    for (let place = 0; place < 6; place++)
      running += ktBits(
        [...symbols].filter((_, i) => i % 6 === place),
        16,
      );
    expect(coder.price!(sequence, setupOf('never')).idealBits).toBeCloseTo(running, 6);
  });

  it('is the coder without it where the record is one symbol long, also by name', () => {
    const sequence = records();
    for (const policy of ['sent', 'learned'] as const) {
      for (let order = 0; order <= 3; order++) {
        const setup = { ...setupOf('message'), policy };
        expect(bytesOf(`arith:order=${order},position=1`, sequence, setup)).toEqual(
          bytesOf(`arith:order=${order}`, sequence, setup),
        );
        expect(parseCandidate(`arith:order=${order},position=1`).id).toBe(`arith:order=${order}`);
      }
    }
  });

  it('takes 1 to 65 536', () => {
    expect(() => parseCandidates('arith:order=0,position=0')).toThrow(InputError);
    expect(() => parseCandidates('arith:order=0,position=65537')).toThrow(InputError);
    expect(parseCandidate('arith:order=0,position=65536').id).toBe('arith:order=0,position=65536');
  });
});
