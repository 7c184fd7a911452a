/**
 * Stationary chains whose entropy rate has a closed form (Cover & Thomas, "Elements of Information Theory", §4.2): the
 * rates were computed outside by two methods; here each source is simulated with a fixed seed.
 */
import { describe, expect, it } from 'vitest';
import { entropyByOrder } from '../../src/entropy/entropy-by-order.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';
import { type MarkovSource, rateAndVariance, simulate } from './markov-chain.ts';
import vectors from './vectors/entropy-rates.json' with { type: 'json' };

interface Chain {
  readonly name: string;
  readonly source: MarkovSource;
  readonly rate: number;
}

const chains: Chain[] = vectors.cases.flatMap((vector): Chain[] => {
  if (vector.kind === 'bernoulli') {
    const p = vector.p!;
    const source = { alphabetSize: 2, order: 0, law: [[1 - p, p]] };
    return [{ name: `one bit in ${1 / p}`, source, rate: vector.entropy_bits! }];
  }
  const rate = vector.entropy_rate_bits!;
  if (vector.kind === 'markov2') {
    const a = vector.p01!;
    const b = vector.p10!;
    const law = [
      [1 - a, a],
      [b, 1 - b],
    ];
    return [
      { name: `two states, ${a} and ${b}`, source: { alphabetSize: 2, order: 1, law }, rate },
    ];
  }
  if (vector.kind === 'markov_n') {
    const law = vector.T!;
    const source = { alphabetSize: law.length, order: 1, law };
    return [{ name: `${law.length} states, rate ${rate}`, source, rate }];
  }
  const ones = vector.P1_given_ab!;
  const law = (['00', '01', '10', '11'] as const).map((ab) => [1 - ones[ab], ones[ab]]);
  return [{ name: 'two predecessors', source: { alphabetSize: 2, order: 2, law }, rate }];
});

const LENGTH = 200_000;

/** What five standard errors and the next term of the bias (below 10 ÷ N bits for these chains) allow. */
const allowance = (variance: number) => 5 * Math.sqrt(variance / LENGTH) + 10 / LENGTH;

it('covers every kind of source', () => {
  expect(chains.map((chain) => chain.source.order)).toEqual(expect.arrayContaining([0, 1, 2]));
  expect(chains.length).toBe(vectors.cases.length);
});

describe.each(chains)('$name', ({ source, rate }) => {
  const theory = rateAndVariance(source);

  it('has the rate found outside', () => {
    expect(theory.rate).toBeCloseTo(rate, 9);
  });

  it('is estimated at its own order and above, where that is estimable', () => {
    const symbols = simulate(source, LENGTH, new SeededGenerator(`${rate}`));
    const { orders, largestEstimable } = entropyByOrder(oneMessage(symbols, source.alphabetSize), {
      upto: source.order + 2,
      contexts: 'running',
    });
    expect(largestEstimable).toBeGreaterThanOrEqual(source.order);
    for (let k = source.order; k <= largestEstimable; k++) {
      expect(Math.abs(orders[k].corrected - rate)).toBeLessThan(allowance(theory.variance));
    }
  });
});

it('the interval of an estimable order holds the rate about as often as it says', () => {
  const { source, rate } = chains.find((chain) =>
    chain.name.startsWith('two states, 0.1 and 0.3'),
  )!;
  const runs = 200;
  let missed = 0;
  for (let run = 0; run < runs; run++) {
    const symbols = simulate(source, 10_000, new SeededGenerator(`coverage ${run}`));
    const order = entropyByOrder(oneMessage(symbols, 2), { upto: 1, contexts: 'running' })
      .orders[1];
    expect(order.estimable).toBe(true);
    if (order.low > rate || order.high < rate) missed++;
  }
  // Binomial(200, 0.05): mean 10, standard deviation 3.08; five of those on either side, cut at 0.
  expect(missed).toBeLessThanOrEqual(25);
  expect(missed).toBeGreaterThan(0);
});
