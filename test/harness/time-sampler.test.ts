import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { type TimedTask, takeSample } from '../../src/harness/time-sampler.ts';

/** A machine on which nothing takes time but what says so. */
class Machine {
  now = 0;
  looks = 0;
  readonly clock = () => {
    this.looks++;
    return this.now;
  };

  task(seconds: number, readySeconds?: number): TimedTask & { runs: number } {
    const task = {
      runs: 0,
      run: () => {
        this.now += seconds;
        task.runs++;
      },
    };
    if (readySeconds === undefined) return task;
    return Object.assign(task, {
      ready: () => {
        this.now += readySeconds;
      },
    });
  }
}

const RULE = { shortestSeconds: 0.02, longestSeconds: 0.2 };

describe('a sample', () => {
  test('is one run where a run lasts long enough', () => {
    const machine = new Machine();
    const task = machine.task(0.5);
    expect(takeSample(task, RULE, machine.clock)).toBe(0.5);
    expect(task.runs).toBe(1);
  });

  test.each([1e-7, 3e-6, 1e-4, 0.003, 0.0199])(
    'repeats runs of %f s for 20 ms, no longer than it must',
    (seconds) => {
      const machine = new Machine();
      const task = machine.task(seconds);
      expect(takeSample(task, RULE, machine.clock)).toBeCloseTo(seconds, 12);
      const least = Math.ceil(0.02 / seconds - 1e-6);
      expect(task.runs).toBeGreaterThanOrEqual(least);
      // At most one block between two looks beyond: about 50 µs, or a run.
      expect(task.runs).toBeLessThanOrEqual(least + Math.ceil(1e-4 / seconds));
      // A look takes about 0.1 µs: next to nothing of 20 ms.
      expect(machine.looks).toBeLessThan(2000);
    },
  );

  test('counts the runs alone, not what is made ready for them', () => {
    fc.assert(
      fc.property(fc.double({ min: 1e-4, max: 0.03, noNaN: true }), (seconds) => {
        const machine = new Machine();
        const task = machine.task(seconds, 0.0001);
        expect(takeSample(task, RULE, machine.clock)).toBeCloseTo(seconds, 12);
      }),
    );
  });

  test('makes ready before every run', () => {
    const machine = new Machine();
    let isReady = false;
    const task = {
      ready: () => {
        isReady = true;
      },
      run: () => {
        expect(isReady).toBe(true);
        isReady = false;
        machine.now += 1e-6;
      },
    };
    takeSample(task, { shortestSeconds: 1e-4, longestSeconds: 1 }, machine.clock);
  });

  test('gives up after a while where making ready takes nearly all of the time', () => {
    const machine = new Machine();
    const task = machine.task(1e-4, 0.05);
    expect(takeSample(task, RULE, machine.clock)).toBeCloseTo(1e-4, 12);
    expect(machine.now).toBeLessThan(0.2 + 0.051);
  });

  test('is above 0 on a clock that sees nothing pass until it ends', () => {
    let looks = 0;
    const clock = () => (++looks > 8 ? 1 : 0);
    expect(takeSample({ run: () => {} }, RULE, clock)).toBeGreaterThan(0);
  });
});
