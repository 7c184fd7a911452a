import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import { creepOf } from '../../src/gate/creep.ts';
import { type AdoptedRun, adoptedRunOf, parseHistory } from '../../src/gate/history.ts';
import { stepsOf } from '../../src/gate/steps.ts';
import { historyScreen, leadingCells } from '../../src/report/gate-history.ts';
import { cellOf, hashOf, recordOf, timesOf } from './made-up.ts';

const ID = 'a/huffman@sent/message';
const OTHER = 'b/arith@learned/message';

const allow = (total: number | string) => ({ total, each_file: 0 });

/** A run of which only carried bits are known, adopted on some day. */
function adopted(
  bits: Readonly<Record<string, number>>,
  day = 0,
  more: Partial<AdoptedRun> = {},
): AdoptedRun {
  const cells = Object.entries(bits).map(([id, carried]) => [
    id,
    { corpus: id.split('/')[0], bits: carried, symbols: 1000 },
  ]);
  return {
    history: 1,
    time: new Date(Date.UTC(2026, 0, 1 + day)).toISOString(),
    tool: `0.${day}.0`,
    title: 'made up',
    class: 'c',
    allow: allow(0),
    corpora: { a: 'data of a', b: 'data of b' },
    cells: Object.fromEntries(cells),
    ...more,
  };
}

const series = (bits: readonly number[], more: Partial<AdoptedRun> = {}) =>
  bits.map((carried, day) => adopted({ [ID]: carried }, day, more));

describe('steps', () => {
  it('a step planted in 50 runs is found exactly, wherever it lies', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 49 }),
        fc.integer({ min: 1, max: 10_000 }),
        fc.array(fc.integer({ min: 0, max: 5 }), { minLength: 50, maxLength: 50 }),
        (at, size, gains) => {
          // Bits only ever fall, but for the one step.
          let now = 1_000_000;
          const bits = gains.map((gain, i) => {
            now += i === at ? size : -gain;
            return now;
          });
          const steps = stepsOf(series(bits));
          expect(steps.filter(({ kind }) => kind === 'step')).toEqual([
            { run: at, id: ID, kind: 'step', was: bits[at - 1], now: bits[at] },
          ]);
        },
      ),
    );
  });

  it('need more than was allowed at the time, or than is asked for now', () => {
    const runs = series([1000, 1005, 1005], { allow: allow('0.5%') });
    expect(stepsOf(runs)).toEqual([]);
    expect(stepsOf(runs, 4)).toMatchObject([{ run: 1, kind: 'step' }]);
    expect(stepsOf(series([1000, 1006], { allow: allow('0.5%') }))).toMatchObject([{ run: 1 }]);
  });

  it('creep is said once, at the run that went beyond the best, and again after a new best', () => {
    const runs = series([1000, 1004, 1008, 1012, 1015, 990, 998, 1001], { allow: allow(10) });
    expect(stepsOf(runs)).toEqual([
      { run: 3, id: ID, kind: 'creep', was: 1000, now: 1012 },
      { run: 7, id: ID, kind: 'creep', was: 990, now: 1001 },
    ]);
  });

  it('are not seen over other data, and are over runs that lack the cell', () => {
    const other = adopted({ [ID]: 2000 }, 1, { corpora: { a: 'other data' } });
    expect(stepsOf([adopted({ [ID]: 1000 }), other])).toEqual([]);
    const gap = [adopted({ [ID]: 1000 }), adopted({ [OTHER]: 5 }, 1), adopted({ [ID]: 1001 }, 2)];
    expect(stepsOf(gap)).toEqual([{ run: 2, id: ID, kind: 'step', was: 1000, now: 1001 }]);
  });
});

describe('creep', () => {
  it('sums what cells took since their best, gains against losses', () => {
    const history = [
      adopted({ [ID]: 1000, [OTHER]: 500 }),
      adopted({ [ID]: 1008, [OTHER]: 480 }, 1),
      adopted({ [ID]: 1009, [OTHER]: 490 }, 2),
    ];
    const creep = creepOf(
      history,
      adopted({ [ID]: 1016, [OTHER]: 470, 'b/new@none/message': 9 }),
      allow(15),
    );
    expect(creep).toEqual({
      cells: [
        { id: ID, best: 1000, bestRun: 0, now: 1016, beyond: true },
        { id: OTHER, best: 480, bestRun: 1, now: 470, beyond: false },
      ],
      sum: 16 - 10,
      beyond: [{ id: ID, best: 1000, bestRun: 0, now: 1016, beyond: true }],
    });
    expect(creepOf(history, adopted({ [ID]: 1015 }), allow(15)).beyond).toEqual([]);
  });

  it('starts anew with other data', () => {
    const history = [adopted({ [ID]: 1 }, 0, { corpora: { a: 'other data' } })];
    expect(creepOf(history, adopted({ [ID]: 1000 }), allow(0)).cells).toEqual([]);
  });
});

describe('a line of history', () => {
  const record = recordOf([
    cellOf(ID, 1000, { encode: timesOf(2) }),
    cellOf('a/deflate@none/message', 900, { reference: true }),
    cellOf('a/fixed@none/message', 1000, { verified: false, failure: 'dead' }),
  ]);

  it('keeps verified cells that are no references, with rate and speed', () => {
    const time = new Date('2026-03-04T05:06:07.000Z');
    const run = adoptedRunOf(record, time, { reason: 'a check' });
    expect(run).toMatchObject({
      time: '2026-03-04T05:06:07.000Z',
      reason: 'a check',
      allow: { total: 0, each_file: 0 },
      cells: { [ID]: { corpus: 'a', bits: 8000, symbols: 1000, encode: [0.5, 0.4995, 0.5005] } },
    });
    expect(Object.keys(run.cells)).toEqual([ID]);
    const text = `${JSON.stringify(run)}\n`;
    expect(parseHistory(text + text, 'h.jsonl')).toEqual([run, run]);
  });

  it('knows its data by files and framing', () => {
    const key = (more: object, plan: object = {}) =>
      adoptedRunOf(
        {
          ...record,
          plan: { ...record.plan, ...plan },
          corpora: [{ ...record.corpora[0], ...more }],
        },
        new Date(0),
      ).corpora['a'];
    const keys = [
      key({}),
      key({ sha256: hashOf(9) }),
      key({ messages_as: 'whole' }),
      key({}, { align: 1 }),
      key({}, { split: 'other' }),
    ];
    expect(new Set(keys).size).toBe(keys.length);
    expect(key({})).toBe(keys[0]);
  });

  it.each([
    ['{"history":1', 2, /not JSON/],
    ['>>>>>>> theirs', 2, /not JSON/],
    ['{"history":1}', 2, /no adopted run/],
    ['[]', 2, /no adopted run/],
  ])('that is %s is refused with its number', (broken, line, message) => {
    const text = `${JSON.stringify(adopted({ [ID]: 1 }))}\n${broken}\n`;
    try {
      parseHistory(text, 'h.jsonl');
      expect.unreachable();
    } catch (error) {
      expect(error).toBeInstanceOf(InputError);
      expect(error).toMatchObject({ message: expect.stringMatching(message), where: { line } });
    }
  });

  it('may be empty', () => {
    expect(parseHistory('\n', 'h.jsonl')).toEqual([]);
  });
});

describe('the screen of history', () => {
  it.each([80, 100])('names the run of a step and its reason within %i columns', (columns) => {
    const runs = series([1000, 1000, 1000, 1040, 1040]);
    runs[3] = { ...runs[3], reason: 'a check of 4 bytes, asked for by the ground station' };
    const screen = historyScreen(runs, stepsOf(runs), leadingCells(runs), columns);
    for (const line of screen.split('\n')) expect([...line].length).toBeLessThan(columns);
    expect(screen).toContain('run 4 (2026-01-04, 0.3.0); reason: a check of 4 bytes');
    expect(screen).toContain(`${ID} +40 bits (+4.00 %) over the run before`);
    expect(screen).toMatch(/^ {3}4 {2}2026-01-04 {2}0\.3\.0 +1\.040 +\+40 .* step$/m);
    expect(screen).toContain('2 runs without a change of bits left out');
  });
});
