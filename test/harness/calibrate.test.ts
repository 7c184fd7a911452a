import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import {
  CALIBRATION_SIZES,
  calibrationSources,
  repetitionsAt,
  runCalibration,
} from '../../src/harness/calibrate.ts';
import { calibrationRecordSchema } from '../../src/harness/calibrate-record.ts';
import { calibrationSourceNames } from '../../src/harness/calibrate-sources.ts';

const small = { sources: ['chain-1', 'switching'], sizes: [500, 2000], rough: true };

describe('runCalibration', () => {
  it('gives the same record each time, of the shape that is declared', async () => {
    const record = await runCalibration(small);
    expect(calibrationRecordSchema.parse(record)).toEqual(record);
    expect(await runCalibration(small)).toEqual(record);
    expect(record.partial).toBe(false);
    expect(record.sources.map((source) => source.name)).toEqual(['chain-1', 'switching']);
    expect(record.intervals.map((line) => [line.symbol_count, line.k])).toEqual(
      [500, 2000].flatMap((size) => [0, 1, 2, 3].map((k) => [size, k])),
    );
    for (const line of record.intervals) expect(line.repetitions).toBe(60);
    // A source that changes has no rate to hold anything against.
    expect(record.coders.every((line) => line.source === 'chain-1')).toBe(true);
    expect(record.changes.map((line) => line.changes)).toContain(true);
  });

  it('holds coders against what each stretch contains', async () => {
    const { coders } = await runCalibration({
      ...small,
      sources: ['chain-1', 'period-12', 'hidden-2'],
    });
    for (const line of coders) {
      expect(line.verdict).toBe('holds');
      expect(line.carried! * line.symbol_count).toBeGreaterThan(
        line.own_content * line.symbol_count - 30,
      );
      // Carried bits are all there is: rounding up the ideal of an arithmetic code costs a few bytes.
      if (line.candidate.startsWith('arith')) {
        const extra = (line.carried! - line.ideal!) * line.symbol_count;
        expect(extra).toBeGreaterThan(-1);
        expect(extra).toBeLessThan(64);
      }
    }
    expect(new Set(coders.map((line) => line.candidate))).toContain('huffman');
  });

  it('keeps what is done when it is interrupted, and shows its way there', async () => {
    let asked = 0;
    const states: number[] = [];
    const record = await runCalibration(small, {
      interrupted: () => ++asked > 40,
      progress: ({ cellsDone, cellsTotal }) => {
        expect(cellsTotal).toBe(Math.round((2 * 60 * (500 + 2000)) / 1000));
        states.push(cellsDone);
      },
    });
    expect(record.partial).toBe(true);
    expect(record.intervals.length).toBe(4);
    expect(record.intervals[0].repetitions).toBeGreaterThan(0);
    expect(record.intervals[0].repetitions).toBeLessThan(60);
    expect(states).toEqual([...states].sort((a, b) => a - b));
  });

  it('stops before anything is done and says so', async () => {
    const record = await runCalibration(small, { interrupted: () => true });
    expect(record).toMatchObject({
      partial: true,
      intervals: [],
      coders: [],
      changes: [],
      broken: 0,
    });
  });

  it('knows its sources, each asked once, and proposes the nearest name', () => {
    expect(calibrationSources([]).map((s) => s.name)).toEqual(calibrationSourceNames);
    expect(calibrationSources(['chain-1', 'chain-1']).length).toBe(1);
    expect(() => calibrationSources(['chian-1'])).toThrow(InputError);
  });
});

it('draws 200 stretches up to 10^5 symbols, 20 of 10^6 and one of 10^7', () => {
  expect(CALIBRATION_SIZES.map((size) => repetitionsAt(size, false))).toEqual([
    200, 200, 200, 20, 1,
  ]);
});
