import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { CorruptStreamError, LimitError } from '../../src/errors/errors.ts';
import type { ContextTree } from '../../src/models/context-tree.ts';
import {
  NODE_PARENT,
  NODE_SECOND,
  NODE_SYMBOL,
  NODE_WORDS,
} from '../../src/models/context-tree.ts';
import { PairTrainer } from '../../src/models/pair-tree.ts';
import { readSentTable, roundCount, writeSentTable } from '../../src/models/sent-table.ts';
import { RangeDecoder } from '../../src/stages/range-decoder.ts';
import { RangeEncoder } from '../../src/stages/range-encoder.ts';
import { type ModelCase, modelCases } from './model-cases.ts';

function train({ alphabetSize, order, symbols, ends }: ModelCase): ContextTree {
  const trainer = new PairTrainer(alphabetSize, order, true);
  trainer.push({ alphabetSize, symbols, messageEnds: Uint32Array.from(ends) });
  return trainer.pairs.tree;
}

function written(tree: ContextTree, order: number): Uint8Array {
  const writer = new BitWriter();
  const encoder = new RangeEncoder(writer, 48);
  encoder.begin();
  writeSentTable(tree, order, encoder);
  encoder.end('any');
  return writer.finish().bytes;
}

function read(bytes: Uint8Array, m: number, order: number, maxPairs: number): ContextTree {
  const decoder = new RangeDecoder(new BitReader(bytes), 48);
  decoder.begin();
  return readSentTable(m, order, maxPairs, decoder);
}

/** Every string of order + 1 symbols with its count, by `countOf`. */
function longest(tree: ContextTree, order: number, countOf: (count: number) => number) {
  const strings = new Map<string, number>();
  const { words } = tree;
  for (let node = 1; node < tree.nodeCount; node++) {
    const path: number[] = [];
    for (let at = node; at !== 0; at = words[at * NODE_WORDS + NODE_PARENT]) {
      path.unshift(words[at * NODE_WORDS + NODE_SYMBOL]);
    }
    const count = words[node * NODE_WORDS + NODE_SECOND];
    if (path.length === order + 1 && count > 0) strings.set(path.join(), countOf(count));
  }
  return strings;
}

describe('a sent table', () => {
  it('comes back with the same strings and the rounded counts', () => {
    fc.assert(
      fc.property(modelCases, (sample) => {
        const tree = train(sample);
        const { alphabetSize, order } = sample;
        const back = read(written(tree, order), alphabetSize, order, sample.symbols.length);
        expect(longest(back, order, (count) => count)).toEqual(longest(tree, order, roundCount));
      }),
      { numRuns: 300, seed: 71 },
    );
  });

  it('rounds a count by at most half of it, and a rounded one no further', () => {
    for (let count = 1; count < 70_000; count += 1 + (count >> 6)) {
      expect(Math.abs(roundCount(count) - count)).toBeLessThanOrEqual(count / 2);
      expect(roundCount(roundCount(count))).toBe(roundCount(count));
    }
  });

  it('is refused when it has more strings than symbols', () => {
    const symbols = Uint16Array.from({ length: 300 }, (_, i) => i % 100);
    const tree = train({ alphabetSize: 256, order: 1, symbols, ends: [300] });
    const bytes = written(tree, 1);
    expect(() => read(bytes, 256, 1, 50)).toThrow(LimitError);
  });

  it('reads any bytes as a table or refuses them', () => {
    const cases = fc.tuple(
      fc.uint8Array({ maxLength: 400 }),
      fc.constantFrom(2, 256, 65536),
      fc.nat(3),
    );
    fc.assert(
      fc.property(cases, ([bytes, m, order]) => {
        try {
          const strings = longest(read(bytes, m, order, 1000), order, (count) => count);
          expect(strings.size).toBeLessThanOrEqual(1000);
        } catch (error) {
          if (!(error instanceof CorruptStreamError || error instanceof LimitError)) throw error;
        }
      }),
      { numRuns: 300, seed: 72 },
    );
  });
});
