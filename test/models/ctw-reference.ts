/** An exact fraction. */
export interface Fraction {
  readonly top: bigint;
  readonly bottom: bigint;
}

const times = (a: Fraction, b: Fraction): Fraction => ({
  top: a.top * b.top,
  bottom: a.bottom * b.bottom,
});

const halfSum = (a: Fraction, b: Fraction): Fraction => ({
  top: a.top * b.bottom + b.top * a.bottom,
  bottom: 2n * a.bottom * b.bottom,
});

/** Krichevsky–Trofimov probability of a sequence with so many zeros and ones, bit by bit. */
function estimate(zeros: number, ones: number): Fraction {
  let result: Fraction = { top: 1n, bottom: 1n };
  for (let n = 0; n < zeros + ones; n++) {
    const same = n < zeros ? n : n - zeros;
    result = times(result, { top: BigInt(2 * same + 1), bottom: BigInt(2 * n + 2) });
  }
  return result;
}

/**
 * Weighted probability of a binary sequence given its past, by the block form of the method: for each context counts of the
 * whole sequence, then from the leaves to the root Pw = ½ Pe + ½ Pw(0) Pw(1). In exact fractions; nothing is shared with
 * the program's model, which works bit by bit.
 */
export function weightedProbability(past: string, sequence: string, depth: number): Fraction {
  const all = past + sequence;
  const weigh = (context: string): Fraction => {
    let zeros = 0;
    let ones = 0;
    for (let i = past.length; i < all.length; i++) {
      if (!all.slice(0, i).endsWith(context)) continue;
      if (all[i] === '1') ones++;
      else zeros++;
    }
    const own = estimate(zeros, ones);
    if (context.length === depth) return own;
    return halfSum(own, times(weigh(`0${context}`), weigh(`1${context}`)));
  };
  return weigh('');
}

/** −log2, by leading digits and lengths: exact to double precision for long fractions too. */
export function bitsOf({ top, bottom }: Fraction): number {
  const log2 = (value: bigint): number => {
    const digits = value.toString(2);
    return Math.log2(Number.parseInt(digits.slice(0, 52), 2)) + Math.max(0, digits.length - 52);
  };
  return log2(bottom) - log2(top);
}
