import { availableParallelism, freemem } from 'node:os';
import { describe, expect, it } from 'vitest';
import { parsePlan } from '../../src/corpus/plan.ts';
import { InputError } from '../../src/errors/errors.ts';
import { budgetOf, USUAL_BUDGET, usualLanes } from '../../src/harness/budget.ts';
import type { CorpusData } from '../../src/harness/corpus-data.ts';

const plan = (budget: string) =>
  parsePlan(
    `plan: 1\ncorpora:\n  log: {files: a.log, symbols: bytes, messages: lines}\ncandidates: [huffman]\n${budget}`,
    'plan.yaml',
  );

describe('the budget of a plan', () => {
  it('is read, and the usual where the plan says nothing', () => {
    expect(budgetOf(plan('budget: {cell_seconds: 1.5, cell_memory: 512MB}\n').budget)).toEqual({
      seconds: 1.5,
      memoryBytes: 512e6,
    });
    expect(budgetOf(plan('budget: {cell_memory: 2GiB}\n').budget)).toEqual({
      seconds: USUAL_BUDGET.seconds,
      memoryBytes: 2 ** 31,
    });
    expect(budgetOf(plan('').budget)).toEqual(USUAL_BUDGET);
  });

  it.each(['{cell_seconds: 0}', '{cell_seconds: -1}', '{cell_memory: much}', '{cell_memory: 512}'])(
    'is refused as %s, with its line',
    (text) => {
      expect(() => plan(`budget: ${text}\n`)).toThrow(InputError);
      expect(() => plan(`budget: ${text}\n`)).toThrow(/line 5/);
    },
  );
});

describe('the number of workers', () => {
  /** All that matters here is how many bytes there would be. */
  const corpusOf = (bytes: number) => ({ test: { symbols: { byteLength: bytes } } }) as CorpusData;

  it('is that of the cores for small data, and 1 where memory holds no second one', () => {
    const small = { seconds: 1, memoryBytes: 1e6 };
    expect(usualLanes([corpusOf(1000)], small)).toBe(availableParallelism());
    const large = { seconds: 1, memoryBytes: 4 * freemem() };
    expect(usualLanes([corpusOf(1000), corpusOf(freemem())], large)).toBe(1);
    expect(usualLanes([], USUAL_BUDGET)).toBeGreaterThanOrEqual(1);
  });
});
