/** Below this the asymptotic series are not used: arguments are first raised by the recurrences. */
const ASYMPTOTIC_FROM = 16;

/**
 * ψ(x), the derivative of ln Γ(x), for x > 0. Absolute error below 10^−13 where |ψ| is of order 1.
 *
 * Source: Abramowitz & Stegun, "Handbook of Mathematical Functions", 1964, 6.3.5 (recurrence) and 6.3.18 (series).
 */
export function digamma(x: number): number {
  let raised = 0;
  let y = x;
  for (; y < ASYMPTOTIC_FROM; y++) raised += 1 / y;
  const s = 1 / (y * y);
  const series =
    s *
    (1 / 12 - s * (1 / 120 - s * (1 / 252 - s * (1 / 240 - s * (1 / 132 - s * (691 / 32760))))));
  return Math.log(y) - 1 / (2 * y) - series - raised;
}

/**
 * ψ′(x), the derivative of {@link digamma}, for x > 0.
 *
 * Source: Abramowitz & Stegun 1964, 6.4.6 and 6.4.12.
 */
export function trigamma(x: number): number {
  let raised = 0;
  let y = x;
  for (; y < ASYMPTOTIC_FROM; y++) raised += 1 / (y * y);
  const s = 1 / (y * y);
  const series = s * (1 / 6 - s * (1 / 30 - s * (1 / 42 - s * (1 / 30 - s * (5 / 66)))));
  return raised + (1 + 1 / (2 * y) + series) / y;
}

/** What Stirling's formula leaves of ln Γ(x), x ≥ 16. Source: Abramowitz & Stegun 1964, 6.1.41. */
function stirlingRest(x: number): number {
  const s = 1 / (x * x);
  return (1 / 12 - s * (1 / 360 - s * (1 / 1260 - s * (1 / 1680 - s / 1188)))) / x;
}

/**
 * ln(x (x + 1) … (x + n − 1)) = ln Γ(x + n) − ln Γ(x) for x > 0 and an integer n ≥ 0, without the cancellation that the
 * difference of two large logarithms would suffer: x may be 10^20 while n is 3.
 */
export function logRisingFactorial(x: number, n: number): number {
  let sum = 0;
  let y = x;
  let left = n;
  for (; left > 0 && y < ASYMPTOTIC_FROM; left--, y++) sum += Math.log(y);
  if (left === 0) return sum;
  const end = y + left;
  return (
    sum +
    (y - 0.5) * Math.log1p(left / y) +
    left * (Math.log(end) - 1) +
    stirlingRest(end) -
    stirlingRest(y)
  );
}
