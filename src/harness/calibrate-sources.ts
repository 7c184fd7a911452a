import { SeededGenerator } from '../statistics/generator.ts';
import { hiddenMarkovSource } from './calibrate-hidden.ts';
import { markovSource } from './calibrate-markov.ts';
import type { CalibrationSource } from './calibrate-source.ts';
import { driftingSource, periodicSource, switchingSource } from './calibrate-special.ts';

/** Laws that are drawn, not written down, are drawn from this. */
const LAW_SEED = 'bitassay calibrate, laws, 1';

function evenSource(alphabetSize: number): CalibrationSource {
  return markovSource({
    name: `even-${alphabetSize}`,
    description: `${alphabetSize} symbols, all equally likely`,
    alphabetSize,
    order: 0,
    law: new Float64Array(alphabetSize).fill(1 / alphabetSize),
  });
}

function independentSource(name: string, description: string, weights: readonly number[]) {
  const total = weights.reduce((sum, weight) => sum + weight, 0);
  return markovSource({
    name,
    description,
    alphabetSize: weights.length,
    order: 0,
    law: Float64Array.from(weights, (weight) => weight / total),
  });
}

/**
 * A source of the given order with `successors` possible symbols after each context, which ones and how likely drawn once
 * for all: weights are powers of a uniform number, so that rows are skewed.
 */
function drawnSource(
  name: string,
  description: string,
  alphabetSize: number,
  order: number,
  successors: number,
): CalibrationSource {
  const generator = new SeededGenerator(`${LAW_SEED}, ${name}`);
  const law = new Float64Array(alphabetSize ** (order + 1));
  for (let row = 0; row < law.length; row += alphabetSize) {
    const symbols = Array.from({ length: alphabetSize }, (_, s) => s);
    const weights: number[] = [];
    for (let i = 0; i < successors; i++) {
      const pick = generator.integer(i, alphabetSize - 1);
      [symbols[i], symbols[pick]] = [symbols[pick], symbols[i]];
      weights.push(0.02 + generator.real() ** 2);
    }
    const total = weights.reduce((sum, weight) => sum + weight, 0);
    for (let i = 0; i < successors; i++) law[row + symbols[i]] = weights[i] / total;
  }
  return markovSource({ name, description, alphabetSize, order, law });
}

const chainOfRows = (
  name: string,
  description: string,
  order: number,
  rows: readonly (readonly number[])[],
): CalibrationSource =>
  markovSource({
    name,
    description,
    alphabetSize: rows[0].length,
    order,
    law: Float64Array.from(rows.flat()),
  });

/** Each source by the name under which it can be asked for; made only when it is. */
const makers: ReadonlyMap<string, () => CalibrationSource> = new Map([
  ['even-2', () => evenSource(2)],
  ['even-256', () => evenSource(256)],
  ['even-65536', () => evenSource(65_536)],
  [
    'halving-12',
    () =>
      independentSource(
        'halving-12',
        'independent, each of 12 symbols half as likely as the one before',
        Array.from({ length: 12 }, (_, i) => 2 ** -Math.min(i + 1, 11)),
      ),
  ],
  [
    'geometric-256',
    () =>
      independentSource(
        'geometric-256',
        'independent, each of 256 symbols 0.95 times as likely as the one before',
        Array.from({ length: 256 }, (_, i) => 0.95 ** i),
      ),
  ],
  [
    'rarer-bit',
    () => independentSource('rarer-bit', 'independent bits, one in 1000 set', [999, 1]),
  ],
  ['rare-bit', () => independentSource('rare-bit', 'independent bits, one in 100 set', [99, 1])],
  [
    'chain-1',
    () =>
      chainOfRows('chain-1', 'two states, left with 0.1 and 0.3', 1, [
        [0.9, 0.1],
        [0.3, 0.7],
      ]),
  ],
  [
    'sticky-1',
    () =>
      chainOfRows('sticky-1', 'two states, left with 0.01 and 0.02', 1, [
        [0.99, 0.01],
        [0.02, 0.98],
      ]),
  ],
  [
    'split-1',
    () =>
      chainOfRows('split-1', 'two even choices after each of four symbols: no spread at all', 1, [
        [0.5, 0.5, 0, 0],
        [0, 0.5, 0.5, 0],
        [0, 0, 0.5, 0.5],
        [0.5, 0, 0.5, 0],
      ]),
  ],
  ['sparse-1', () => drawnSource('sparse-1', '6 possible bytes after each of 256', 256, 1, 6)],
  [
    'chain-2',
    () =>
      chainOfRows('chain-2', 'bits with two predecessors', 2, [
        [0.9, 0.1],
        [0.4, 0.6],
        [0.7, 0.3],
        [0.1, 0.9],
      ]),
  ],
  ['chain-3', () => drawnSource('chain-3', 'four symbols, any after any three', 4, 3, 4)],
  ['sparse-4', () => drawnSource('sparse-4', '2 of 4 symbols after any four', 4, 4, 2)],
  ['sparse-5', () => drawnSource('sparse-5', '2 of 3 symbols after any five', 3, 5, 2)],
  ['chain-6', () => drawnSource('chain-6', 'bits with six predecessors', 2, 6, 2)],
  [
    'period-12',
    () =>
      periodicSource(
        'period-12',
        'a word of 12 bits without end',
        2,
        [0, 0, 1, 0, 1, 1, 0, 1, 1, 1, 0, 0],
      ),
  ],
  ['constant', () => periodicSource('constant', 'one of 256 symbols without end', 256, [65])],
  [
    'hidden-2',
    () =>
      hiddenMarkovSource({
        name: 'hidden-2',
        description: 'two hidden states, each shown wrongly once in ten',
        transitions: [
          [0.95, 0.05],
          [0.1, 0.9],
        ],
        ones: [0.1, 0.9],
        span: 16,
      }),
  ],
  [
    'switching',
    () =>
      switchingSource(
        'switching',
        'bits, one in ten set, from the middle on one in four',
        independentSource('', '', [9, 1]),
        independentSource('', '', [3, 1]),
      ),
  ],
  [
    'drifting',
    () =>
      driftingSource(
        'drifting',
        'bits, one in twenty set at first, two in five at last',
        0.05,
        0.4,
      ),
  ],
]);

/** Names of all calibration sources, in the order in which screens list them. */
export const calibrationSourceNames: readonly string[] = [...makers.keys()];

/** The source of that name, or undefined. Cost: up to a second, for linear equations and bounds. */
export function calibrationSource(name: string): CalibrationSource | undefined {
  return makers.get(name)?.();
}
