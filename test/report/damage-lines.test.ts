import { describe, expect, it } from 'vitest';
import { cellDamageSchema } from '../../src/harness/damage-schema.ts';
import type { CellRecord } from '../../src/harness/run-record.ts';
import { damageLines } from '../../src/report/damage-lines.ts';
import { wholeRecord } from './sample-record.ts';

type Damage = NonNullable<CellRecord['damage']>[number];

const all = (x: number) => ({ mean: x, mean_error: 0, p95: x, max: x });

/** Figures made up by hand; no coder was run for them. */
function flips(more: Partial<Damage> = {}): Damage {
  return cellDamageSchema.parse({
    kind: 'flip',
    probability: 0.0001,
    seed: 7,
    share: 0.1234,
    events: 2000,
    errors: 2100,
    detected: 1500,
    by_check: 499,
    undetected: 1,
    harmless: 0,
    symbols_lost: { mean: 71.25, mean_error: 3.2, p95: 216, max: 1240 },
    recovery: { mean: 80, mean_error: 3, p95: 217, max: 1240 },
    messages_after: all(0),
    ...more,
  });
}

function losses(more: Partial<Damage> = {}): Damage {
  const { probability: _, ...rest } = flips({ share: 1 / 62, detected: 0, by_check: 0 });
  return cellDamageSchema.parse({
    ...rest,
    kind: 'lose_messages',
    good_to_bad: 0.01,
    bad_to_good: 0.3,
    lost_in_bad: 0.5,
    lost_in_good: 0,
    unusable_share: 0.2,
    undetected: 2000,
    ...more,
  });
}

const [sample] = wholeRecord.cells;

function cell(
  candidate: string,
  rate: number,
  damage: readonly Damage[] | undefined,
  more: Partial<CellRecord> = {},
): CellRecord {
  const { damage: _, ...rest } = sample;
  return {
    ...rest,
    id: `a/${candidate}@shipped/${more.reset ?? 'message'}`,
    candidate,
    tables: 'shipped',
    reset: 'message',
    reference: false,
    verified: true,
    rate,
    ...(damage === undefined ? {} : { damage: [...damage] }),
    ...more,
  };
}

const rowOf = (lines: readonly string[], start: string) =>
  lines.filter((line) => line.trimStart().startsWith(start)).map((l) => l.trim().split(/ {2,}/));

describe('damage on the screen', () => {
  it('is silent where the plan does not ask', () => {
    expect(damageLines([cell('huffman', 3, undefined)], 'byte', 100)).toEqual([]);
  });

  it('has a table a kind, its columns as the figures are', () => {
    const lines = damageLines([cell('huffman', 3, [flips(), losses()])], 'byte', 100);
    expect(rowOf(lines, 'candidate')[0]).toEqual(
      'candidate,tables,% hit,decoder,CRC-32,neither,lost,most,distance'.split(','),
    );
    // 1500, 499 and 1 of 2000; one in 2000 is not nothing. The mean 71.25 is known to ± 3.2.
    expect(rowOf(lines, 'huffman')).toEqual([
      ['huffman', 'shipped', '12.3', '75', '25', '<1', '71', '1 240', '217'],
      ['huffman', 'shipped', '0', '0', '100', '71', '1 240', '217'],
    ]);
    const text = lines.join(' ').replaceAll(/\s+/g, ' ');
    // 1.96 · ½ ÷ √2000 is 2.2 %.
    expect(text).toContain(
      'Flipped bits, each with probability 0.0001; 2 000 damaged messages, so that % are right within 3 points:',
    );
    // Runs under these four: lost 1/62 of all, and a run begins with 0.01·30/31·0.5 + 0.7·1/31·0.5·0.5 of them.
    const begins = 0.01 * (30 / 31) * 0.5 + 0.7 * (1 / 31) * 0.5 * 0.5;
    const run = Number((1 / 62 / begins).toPrecision(3));
    expect(text).toContain(
      `good to bad 0.01, bad to good 0.3, lost in bad 0.5, in good 0; that is 1.61 % of all, ${run} in a row on average`,
    );
  });

  it.each([100, 80])('keeps within %i columns, and explains what it shows', (columns) => {
    const cells = [
      cell('block-huffman:n=2', 3, [flips({ harmless: 2, by_check: 497 }), losses()]),
      cell(
        'arith:order=2',
        2,
        [flips({ messages_after: { mean: 7.46, mean_error: 0.2, p95: 15, max: 15 } })],
        {
          reset: 'message*16',
          tables: 'learned',
        },
      ),
    ];
    const lines = damageLines(cells, 'byte', columns);
    for (const line of lines) expect([...line].length).toBeLessThanOrEqual(columns);
    const text = lines.join(' ').replaceAll(/\s+/g, ' ');
    for (const [head, words] of [
      ['harmless', 'Harmless:'],
      ['% hit', '% hit:'],
      ['distance', 'Distance:'],
      ['after', 'After:'],
    ]) {
      const isShown = lines.some((line) => line.startsWith('  candidate') && line.includes(head));
      expect(text.includes(words)).toBe(isShown);
    }
    expect(text).toContain("they replace neither your link's own protection nor its certification");
    expect(text).toContain('the link must count them');
  });

  it('shows the best of each reset, and says how many are left out', () => {
    const many = Array.from({ length: 8 }, (_, i) => cell(`rice:k=${i}`, 3 + i, [flips()]));
    const never = cell('huffman', 9, [flips()], { reset: 'never', tables: 'sent' });
    const reference = cell('deflate', 1, [flips()], { reference: true });
    const lines = damageLines([...many, never, reference], 'byte', 100);
    expect(rowOf(lines, 'rice').map(([candidate]) => candidate)).toEqual(
      [0, 1, 2, 3, 4].map((k) => `rice:k=${k}`),
    );
    expect(rowOf(lines, 'huffman')).toHaveLength(1);
    expect(rowOf(lines, 'deflate')).toHaveLength(0);
    expect(lines.join(' ')).toContain('The other 3 cells: run record.');
  });

  it('never shows nearly all as all, and no share of nothing', () => {
    const near = flips({ detected: 1999, by_check: 1, undetected: 0 });
    const none = flips({ events: 0, detected: 0, by_check: 0, undetected: 0 });
    const lines = damageLines([cell('rice', 1, [near]), cell('huffman', 2, [none])], 'byte', 100);
    expect(rowOf(lines, 'rice')[0].slice(3, 6)).toEqual(['>99', '<1', '0']);
    expect(rowOf(lines, 'huffman')[0].slice(3, 6)).toEqual(['–', '–', '–']);
    expect(lines.join(' ').replaceAll(/\s+/g, ' ')).toContain(
      '0 to 2 000 damaged messages, so that % are right within 3 to 100 points',
    );
  });

  it('gives a mean no more digits than its interval carries', () => {
    const lost = (mean: number, error: number) => {
      const damage = flips({ symbols_lost: { mean, mean_error: error, p95: mean, max: mean } });
      return rowOf(damageLines([cell('rice', 1, [damage])], 'byte', 100), 'rice')[0][6];
    };
    expect(lost(51848.765, 12345)).toBe('50 000');
    expect(lost(817.4, 6.1)).toBe('817');
    expect(lost(2.159, 0.04)).toBe('2.16');
    expect(lost(1.0005, 0.0004)).toBe('1.000');
    expect(lost(168, 0)).toBe('168');
  });

  it('names a cell whose damage could not be found out', () => {
    const lines = damageLines(
      [cell('huffman', 3, undefined, { damage_failure: 'its decoder broke' })],
      'byte',
      100,
    );
    expect(lines).toEqual(['! a/huffman@shipped/message: no damage. its decoder broke']);
  });
});
