import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { adaptivePairs, crossingOf, trainingReturn } from '../src/compare/curve-findings.ts';
import { curvesOf } from '../src/compare/curves.ts';
import { parsePlan } from '../src/corpus/plan.ts';
import { requestOf } from '../src/harness/plan-request.ts';
import { cellsOf, runAll } from '../src/harness/run-all.ts';

/** The plan of curves over the demo data: what it lists, and that one of its candidates runs. */

const file = fileURLToPath(new URL('../corpora-demo/curves.yaml', import.meta.url));

describe('the demo’s plan of curves', () => {
  it('varies shares, sizes and folds', async () => {
    const plan = parsePlan(readFileSync(file, 'utf8'), file);
    const { timing: _, ...request } = await requestOf(plan);
    const { cells } = cellsOf(request);
    // Shipped: 4 candidates × 3 shares × 3 sizes × 3 folds; learned: 3 × 3 × 3.
    expect(cells).toHaveLength(4 * 27 + 3 * 9);
    const candidates = request.candidates.filter(({ id }) => id === 'arith:order=0');
    const { record } = await runAll({ ...request, candidates, only: '+fold=1' });
    // Of one candidate in one fold: shipped 9, learned 3.
    expect(record.cells).toHaveLength(12);
    expect(record.cells.filter((cell) => !cell.verified)).toEqual([]);
    const own = curvesOf(record).filter((curve) => curve.variation === '');
    expect(own.map((curve) => curve.over)).toEqual(['train_share', 'message_symbols']);
    const [shares, sizes] = own;
    expect(shares.lines.map((line) => line.points.map(({ x }) => x))).toEqual([[0.1, 0.3, 1]]);
    expect(Number.isFinite(trainingReturn(shares.lines[0]).lastGain)).toBe(true);
    const [pair] = adaptivePairs(sizes);
    expect(pair.adaptive.points.map(({ x }) => x)).toEqual([24, 192, 768]);
    // A message of one record is too short to learn from, one of 32 records is not.
    expect(crossingOf(pair.adaptive, pair.shipped)?.kind).toBe('between');
  }, 60_000);
});
