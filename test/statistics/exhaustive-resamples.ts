/** All n^n resamples of n things, as counts of how often each was drawn; for n small. */
export function* exhaustiveResamples(n: number): Generator<number[]> {
  const drawn = new Array<number>(n).fill(0);
  for (let code = 0; code < n ** n; code++) {
    drawn.fill(0);
    let rest = code;
    for (let i = 0; i < n; i++) {
      drawn[rest % n]++;
      rest = Math.floor(rest / n);
    }
    yield [...drawn];
  }
}
