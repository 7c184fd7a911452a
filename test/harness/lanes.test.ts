import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Lanes } from '../../src/harness/lanes.ts';

const soon = () => new Promise<void>((resolve) => setImmediate(resolve));

describe('lanes', () => {
  it('begin work in the order in which it came, never more at a time than there are, and nothing beside what is alone', async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.integer({ min: 1, max: 4 }),
        fc.array(fc.record({ alone: fc.boolean(), steps: fc.integer({ min: 0, max: 4 }) })),
        async (count, works) => {
          const lanes = new Lanes(count);
          const begun: number[] = [];
          let active = 0;
          let alone = 0;
          await Promise.all(
            works.map((work, i) => {
              const run = async () => {
                begun.push(i);
                active++;
                if (work.alone) alone++;
                for (let step = 0; step < work.steps; step++) {
                  expect(active).toBeLessThanOrEqual(alone > 0 ? 1 : count);
                  await soon();
                }
                active--;
                if (work.alone) alone--;
                return i;
              };
              return work.alone ? lanes.runAlone(run) : lanes.run(run);
            }),
          );
          expect(begun).toEqual(works.map((_, i) => i));
        },
      ),
      { numRuns: 100 },
    );
  });

  it('go on after work that fails, whose error reaches whoever handed it over', async () => {
    const lanes = new Lanes(1);
    const failing = lanes.run(async () => {
      throw new RangeError('not today');
    });
    const after = lanes.run(async () => 'done');
    await expect(failing).rejects.toThrow('not today');
    expect(await after).toBe('done');
  });
});
