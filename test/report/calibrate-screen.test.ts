import { describe, expect, it } from 'vitest';
import type { CalibrationRecord, IntervalLine } from '../../src/harness/calibrate-record.ts';
import { calibrateScreen } from '../../src/report/calibrate-screen.ts';

const interval = (more: Partial<IntervalLine>): IntervalLine => ({
  source: 'chain-1',
  symbol_count: 10_000,
  k: 1,
  against_order: 'own',
  truth: 0.5720694,
  repetitions: 200,
  estimable: 200,
  trusted: 200,
  held: 188,
  too_low: 7,
  too_high: 5,
  bias: -0.0004512,
  spread: 0.0118,
  half_width: 0.02173,
  interval_unit: '256 blocks of positions',
  verdict: 'holds',
  verdict_text: 'holds in 94 %',
  ...more,
});

const record: CalibrationRecord = {
  calibration: 1,
  tool: '0.0.0',
  seed: 'a seed',
  sources: [
    {
      name: 'chain-1',
      description: 'two states, left with 0.1 and 0.3',
      alphabet_size: 2,
      order: 1,
      rate: { low: 0.5720694, high: 0.5720694 },
    },
    {
      name: 'hidden-2',
      description: 'two hidden states',
      alphabet_size: 2,
      rate: { low: 0.69, high: 0.7 },
    },
    { name: 'switching', description: 'changes in the middle', alphabet_size: 2 },
  ],
  intervals: [
    interval({
      k: 0,
      against_order: 'below',
      trusted: 0,
      held: 0,
      verdict: 'flagged beforehand',
      verdict_text: 'order 1 lies below with its whole interval: order 0 is not enough',
    }),
    interval({}),
    interval({ k: 2, against_order: 'above', held: 190 }),
    interval({ symbol_count: 10_000_000, repetitions: 1, trusted: 1, held: 1 }),
    interval({ source: 'hidden-2', k: 4, against_order: 'none', truth: 0.699 }),
  ],
  estimators: [
    ...['plug-in', 'Miller–Madow', 'Grassberger', 'Chao–Shen'].map((estimator) => ({
      source: 'chain-1',
      symbol_count: 10_000,
      k: 1,
      estimator,
      repetitions: 20,
      bias: -0.0024,
      spread: 0.01,
    })),
    {
      source: 'chain-1',
      symbol_count: 10_000,
      estimator: 'match lengths',
      repetitions: 20,
      bias: 0.0207,
      spread: 0.01,
      held: 13,
    },
  ],
  coders: ['fixed', 'arith:order=1'].flatMap((candidate) =>
    [1000, 10_000, 100_000, 1_000_000].map((symbol_count) => ({
      source: 'chain-1',
      symbol_count,
      candidate,
      tables: candidate === 'fixed' ? 'none' : 'learned',
      rate: 0.5720694,
      own_content: 0.57,
      ideal: candidate === 'fixed' ? 1 : 0.5725,
      carried: candidate === 'fixed' ? 1 : 0.5727,
      verdict: 'holds' as const,
      verdict_text: 'decoded, and no less than these symbols contain',
    })),
  ),
  changes: [
    {
      source: 'chain-1',
      symbol_count: 10_000,
      changes: false,
      repetitions: 20,
      found: 0,
      verdict: 'holds',
      verdict_text: '0 of 20',
    },
    {
      source: 'switching',
      symbol_count: 10_000,
      changes: true,
      repetitions: 20,
      found: 20,
      verdict: 'holds',
      verdict_text: '20 of 20',
    },
  ],
  broken: 0,
  partial: false,
};

const screenOf = (columns: number, more: Partial<CalibrationRecord> = {}) =>
  calibrateScreen({ ...record, ...more }, { columns });
const squeezed = (text: string) => text.replace(/\s+/g, ' ');

describe('the screen of a calibration', () => {
  it.each([80, 100, 130])('fits %d columns', (columns) => {
    for (const line of screenOf(columns).split('\n'))
      expect([...line].length).toBeLessThanOrEqual(columns);
  });

  it('has a line with its verdict for each source at each length, at its own order and the highest trusted', () => {
    const rows = screenOf(100)
      .split('\n')
      .map((line) => line.trim().split(/\s{2,}/));
    expect(rows).toContainEqual([
      'chain-1',
      '10 000',
      '1',
      '0.5721',
      '−0.00045',
      '0.01180',
      '0.02173',
      '188/200',
      'holds',
    ]);
    expect(rows).toContainEqual([
      '10 000',
      '2',
      '0.5721',
      '−0.00045',
      '0.01180',
      '0.02173',
      '190/200',
      'holds',
    ]);
    // One run has no spread.
    expect(rows).toContainEqual([
      '10 000 000',
      '1',
      '0.5721',
      '−0.00045',
      '–',
      '0.02173',
      '1/1',
      'holds',
    ]);
    expect(squeezed(screenOf(100))).toContain(
      'Of 5 lines over all orders, 1 were flagged before the truth was looked at: 0 since the order is not estimable from so few symbols, 1 since a higher order lies below.',
    );
  });

  it('shows bounds where a rate has no closed form', () => {
    expect(squeezed(screenOf(100))).toContain(
      'hidden-2 0.690000 to 0.700000 – two hidden states, alphabet of 2',
    );
    expect(squeezed(screenOf(100))).toContain('switching changes –');
  });

  it('shows the gap of coders closing, and which change was found', () => {
    const text = squeezed(screenOf(130));
    expect(text).toContain('chain-1 fixed +0.4279 +0.4279 +0.4279 +0.4279 +0.4279 +0.4300 holds');
    expect(text).toContain('arith:order=1 +0.0006 +0.0006 +0.0006 +0.0006 +0.0004 +0.0027 holds');
    expect(text).toContain('switching 10 000 20 of 20 holds');
    expect(text).toContain('0 false alarms in 20 runs');
    expect(text).toContain('held the rate in 13 of 20 runs');
    expect(text).toContain('15 lines judged: no promise is broken.');
  });

  it('says every broken promise in words, also of orders that it else leaves out', () => {
    const broken = interval({
      k: 0,
      against_order: 'below',
      held: 150,
      verdict: 'misses',
      verdict_text: 'holds in 75 %, 85 % is promised',
    });
    const { carried: _, ...coder } = record.coders[0];
    const failed = { ...coder, verdict: 'misses' as const, verdict_text: 'another symbol' };
    const text = squeezed(
      screenOf(80, {
        intervals: [broken, ...record.intervals.slice(1)],
        coders: [failed, ...record.coders.slice(1)],
        broken: 2,
        partial: true,
      }),
    );
    expect(text).toContain('15 lines judged: 2 promises are broken.');
    expect(text).toContain('chain-1, 10 000 symbols, order 0: holds in 75 %, 85 % is promised');
    expect(text).toContain('chain-1, 1 000 symbols, fixed: another symbol');
    expect(text).toContain('chain-1 10 000 0 0.5721 −0.00045 150/200 misses');
    expect(text).toContain('Interrupted: only what was done until then is shown.');
  });

  it('stands where nothing was done', () => {
    const text = screenOf(80, {
      intervals: [],
      estimators: [],
      coders: [],
      changes: [],
      partial: true,
    });
    expect(text).toContain('0 lines judged');
    expect(text).not.toMatch(/undefined|NaN/);
  });
});
