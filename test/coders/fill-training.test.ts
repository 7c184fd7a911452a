import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  NODE_PARENT,
  NODE_SECOND,
  NODE_SYMBOL,
  NODE_WORDS,
  ROOT,
  SYMBOL_MASK,
} from '../../src/models/context-tree.ts';
import { type PairTree, UnitPairTrainer } from '../../src/models/pair-tree.ts';
import { chunksOf, sequences } from '../conformance/sequences.ts';

/** Count of every string of a tree, the string written as its symbols. */
function countsOf({ tree }: PairTree): Map<string, number> {
  const counts = new Map<string, number>();
  for (let node = 1; node < tree.nodeCount; node++) {
    const count = tree.words[node * NODE_WORDS + NODE_SECOND];
    if (count === 0) continue;
    const symbols: number[] = [];
    for (let at = node; at !== ROOT; at = tree.words[at * NODE_WORDS + NODE_PARENT])
      symbols.unshift(tree.words[at * NODE_WORDS + NODE_SYMBOL] & SYMBOL_MASK);
    counts.set(symbols.join(' '), count);
  }
  return counts;
}

/** The same by the rule as it is written, with slices of arrays. */
function countsByRule(
  symbols: ArrayLike<number>,
  unitEnds: ArrayLike<number>,
  m: number,
  order: number,
): Map<string, number> {
  const counts = new Map<string, number>();
  const add = (text: string) => counts.set(text, (counts.get(text) ?? 0) + 1);
  const all = [...Array.from({ length: order }, () => m), ...Array.from(symbols)];
  for (let i = 0; i < symbols.length; i++)
    for (let k = 0; k <= order; k++) add(all.slice(i + order - k, i + order + 1).join(' '));
  for (let u = 1; u < unitEnds.length; u++) {
    const unit = Array.from(symbols).slice(unitEnds[u - 1], unitEnds[u]);
    for (let place = 0; place < Math.min(order, unit.length); place++) {
      for (let k = place + 1; k <= order; k++) {
        const starts = Array.from({ length: k - place }, () => m);
        add([...starts, ...unit.slice(0, place + 1)].join(' '));
      }
    }
  }
  return counts;
}

describe('training of arith under fill', () => {
  it('counts running contexts, and the start contexts of each unit besides', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 0, max: 4 }),
        fc.constantFrom(1, 2, 3, 300).chain((m) => sequences(m)),
        fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { maxLength: 4 }),
        (order, units, shares) => {
          const { alphabetSize, symbols, messageEnds } = units;
          fc.pre(symbols.length < 600);
          const trainer = new UnitPairTrainer(alphabetSize, order);
          const places = shares.map((share) => Math.floor(share * symbols.length));
          for (const chunk of chunksOf(units, places)) trainer.push(chunk);
          const expected = countsByRule(symbols, messageEnds, alphabetSize, order);
          expect(countsOf(trainer.pairs)).toEqual(expected);
        },
      ),
      { seed: 20_261_204, numRuns: 150 },
    );
  });
});
