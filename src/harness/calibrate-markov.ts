import { SeededGenerator } from '../statistics/generator.ts';
import { stationaryShares } from '../statistics/linear-solve.ts';
import { newSymbolArray, type SymbolArray } from '../symbols/sequence.ts';
import { AliasRows, drawShare } from './calibrate-draw.ts';
import { type CalibrationSource, entropyTerm } from './calibrate-source.ts';

/** What sets a stationary Markov source. */
export interface MarkovLaw {
  readonly name: string;
  readonly description: string;
  readonly alphabetSize: number;
  readonly order: number;
  /** Shape [m^order · m]: for each context, numbered with its newest symbol last, the law of the next symbol. */
  readonly law: Float64Array;
}

/**
 * A stationary source whose next symbol depends on `order` predecessors.
 *
 * Its rate is Σ over contexts of their long-run share × the entropy of their row, the shares by a linear solve; nothing is
 * simulated for it.
 * Source: Cover & Thomas, "Elements of Information Theory", 2nd ed. 2006, §4.2, theorem 4.2.4.
 */
export function markovSource({
  name,
  description,
  alphabetSize,
  order,
  law,
}: MarkovLaw): CalibrationSource {
  const contexts = alphabetSize ** order;
  const shares = sharesOfContexts(alphabetSize, contexts, law);
  const rate = conditionalBits(shares, law, alphabetSize, order, order);
  let rows: AliasRows | undefined;
  return {
    name,
    description,
    alphabetSize,
    order,
    rate: { low: rate, high: rate },
    uniform: law.every((p) => p === law[0]),
    stationary: true,
    conditionalBits: (k) =>
      k >= order ? rate : conditionalBits(shares, law, alphabetSize, order, k),
    draw(length, seed) {
      rows ??= new AliasRows(law, alphabetSize);
      const generator = new SeededGenerator(seed);
      return drawMarkov(
        rows,
        alphabetSize,
        contexts,
        drawShare(shares, generator),
        length,
        generator,
      );
    },
    informationBits: (symbols) => informationBits(symbols, shares, law, alphabetSize, order),
  };
}

function sharesOfContexts(m: number, contexts: number, law: Float64Array): Float64Array {
  if (contexts === 1) return Float64Array.of(1);
  const transitions = new Float64Array(contexts * contexts);
  for (let context = 0; context < contexts; context++) {
    for (let symbol = 0; symbol < m; symbol++) {
      const next = (context * m + symbol) % contexts;
      transitions[context * contexts + next] += law[context * m + symbol];
    }
  }
  return stationaryShares(transitions, contexts);
}

/** H(next | k newest symbols) for k ≤ order: rows of contexts that share those are mixed by their shares. */
function conditionalBits(
  shares: Float64Array,
  law: Float64Array,
  m: number,
  order: number,
  k: number,
): number {
  const merged = m ** Math.min(k, order);
  const joint = new Float64Array(merged * m);
  for (let context = 0; context < shares.length; context++) {
    const row = (context % merged) * m;
    for (let symbol = 0; symbol < m; symbol++) {
      joint[row + symbol] += shares[context] * law[context * m + symbol];
    }
  }
  let bits = 0;
  for (let row = 0; row < joint.length; row += m) {
    let total = 0;
    for (let symbol = 0; symbol < m; symbol++) total += joint[row + symbol];
    if (total === 0) continue;
    for (let symbol = 0; symbol < m; symbol++) {
      bits += total * entropyTerm(joint[row + symbol] / total);
    }
  }
  return bits;
}

function drawMarkov(
  rows: AliasRows,
  m: number,
  contexts: number,
  start: number,
  length: number,
  generator: SeededGenerator,
): SymbolArray {
  const symbols = newSymbolArray(m, length);
  // The start is the context before the first symbol, so that the first symbols follow the stationary law too.
  let context = start;
  for (let i = 0; i < length; i++) {
    const symbol = rows.draw(context, generator.real());
    symbols[i] = symbol;
    context = (context * m + symbol) % contexts;
  }
  return symbols;
}

function informationBits(
  symbols: SymbolArray,
  shares: Float64Array,
  law: Float64Array,
  m: number,
  order: number,
): number {
  if (symbols.length < order) {
    // Contexts that end in these symbols, whatever came before them.
    let last = 0;
    for (let i = 0; i < symbols.length; i++) last = last * m + symbols[i];
    const merged = m ** symbols.length;
    let share = 0;
    for (let context = last; context < shares.length; context += merged) share += shares[context];
    return -Math.log2(share);
  }
  let context = 0;
  for (let i = 0; i < order; i++) context = context * m + symbols[i];
  let bits = -Math.log2(shares[context]);
  for (let i = order; i < symbols.length; i++) {
    const pair = context * m + symbols[i];
    bits -= Math.log2(law[pair]);
    context = pair % shares.length;
  }
  return bits;
}
