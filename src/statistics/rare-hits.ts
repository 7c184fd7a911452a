import type { SeededGenerator } from './generator.ts';

/** Probability that at least one of `places` is hit, each with probability `chance`: exact also where both are small. */
export function hitShare(places: number, chance: number): number {
  return -Math.expm1(places * Math.log1p(-chance));
}

/**
 * Which of the places 0 … places − 1 are hit, each with probability `chance` whatever became of the others, given that at
 * least one is: in rising order. Cost: one draw a hit, however many places there are.
 * @param places  at least 1
 * @param chance  above 0, below 1
 */
export function drawHits(places: number, chance: number, generator: SeededGenerator): number[] {
  const logMiss = Math.log1p(-chance);
  // The first hit follows a geometric law cut at the end; the gaps after it the whole geometric law.
  const first = Math.log1p(-generator.real() * hitShare(places, chance)) / logMiss;
  const hits = [Math.min(places - 1, Math.floor(first))];
  for (;;) {
    const gap = Math.floor(Math.log(1 - generator.real()) / logMiss);
    const next = hits[hits.length - 1] + 1 + gap;
    if (!(next < places)) return hits;
    hits.push(next);
  }
}
