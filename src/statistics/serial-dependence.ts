/** One-sided 1 % point of the normal law. */
const RARELY = 2.326;

/**
 * Whether neighbours in a series lie on the same side of its mean more than chance would put them there: then the mean of
 * the series is less certain than resampling of single values says. Finds trends and slow swings; true for about 1 in 100
 * series of independent values.
 *
 * @param values  shape [n], in their order; below 8 the answer is always false
 * Source: the serial correlation of lag 1, whose mean is −1/n and whose variance about 1/n where values are independent;
 * Anderson, "Distribution of the serial correlation coefficient", 1942.
 */
export function neighboursLeanAlike(values: ArrayLike<number>): boolean {
  const n = values.length;
  if (n < 8) return false;
  let mean = 0;
  for (let i = 0; i < n; i++) mean += values[i] / n;
  let squares = 0;
  let products = 0;
  for (let i = 0; i < n; i++) {
    squares += (values[i] - mean) ** 2;
    if (i > 0) products += (values[i] - mean) * (values[i - 1] - mean);
  }
  // Values that differ by rounding alone have no order to speak of.
  if (squares <= n * (mean * 1e-12) ** 2) return false;
  return products / squares > -1 / n + RARELY / Math.sqrt(n);
}
