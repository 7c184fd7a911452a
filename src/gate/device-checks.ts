import { compareCellSpeeds } from '../compare/cell-speeds.ts';
import { type BaselineCell, type BaselineEnd, OPERATIONS } from './baseline.ts';
import type { GateCheck, GateVerdict } from './gate-check.ts';
import type { PairedCell } from './pairing.ts';

const SIZES = ['flash_bytes', 'ram_bytes', 'code_bytes'] as const;
const END_FIGURES = [
  ...SIZES,
  ...OPERATIONS,
  ...OPERATIONS.map((kind) => `${kind}_worst` as const),
] satisfies (keyof BaselineEnd)[];

/** Sizes and operations of both ends: exact. */
function endChecks({ was, now }: PairedCell): GateCheck[] {
  return (['encoder', 'decoder'] as const).flatMap((end) =>
    END_FIGURES.flatMap((key): GateCheck[] => {
      const [before, after] = [was[end]?.[key], now[end]?.[key]];
      const figure = `${end}.${key}`;
      if (before === undefined) return [];
      if (after === undefined) {
        const reason = 'the coder does not tell it any more';
        return [{ figure, verdict: 'not compared', was: before, reason }];
      }
      const grown: GateVerdict = after > before ? 'lost' : 'better';
      return [{ figure, verdict: after === before ? 'held' : grown, was: before, now: after }];
    }),
  );
}

const timedOf = (id: string, { timed, encode, decode }: BaselineCell) => ({
  id,
  timed,
  encode: samplesOf(encode),
  decode: samplesOf(decode),
});

function samplesOf(times: BaselineCell['encode']) {
  if (times === undefined) return undefined;
  const { samples, unsteady } = times;
  return { seconds: samples, pacer_seconds: samples.map(() => 1), unsteady };
}

function speedCheck(
  { id, was, now }: PairedCell,
  end: 'encode' | 'decode',
  classes: readonly [string, string],
): GateCheck[] {
  const [before, after] = [was[end], now[end]];
  if (before === undefined) return [];
  const figure = `${end}.speed`;
  if (after === undefined) {
    return [{ figure, verdict: 'not compared', was: before.speed, reason: 'not timed' }];
  }
  const speeds = { figure, was: before.speed, now: after.speed };
  const found = compareCellSpeeds(
    { environment: { class: classes[0] }, cell: timedOf(id, was) },
    { environment: { class: classes[1] }, cell: timedOf(id, now) },
    end,
  );
  if (typeof found === 'string') return [{ ...speeds, verdict: 'not compared', reason: found }];
  const [low, high] = [found.low, found.high].map((ratio) => ratio.toPrecision(3));
  const interval = `takes ${low} to ${high} times as long`;
  const uneven = found.unsteady && found.verdict === 'slower';
  // An uneven machine may have been slow all through one of two runs: time again before a build fails by it.
  if (uneven) {
    const reason = `${interval}, on an uneven machine: time it again`;
    return [{ ...speeds, verdict: 'open', reason }];
  }
  const verdicts = { slower: 'lost', faster: 'better', alike: 'held', undecided: 'open' } as const;
  return [{ ...speeds, verdict: verdicts[found.verdict], reason: interval }];
}

/** What a cell takes on a device, and how fast it is: only over the same data. */
export function deviceChecks(pair: PairedCell, classes: readonly [string, string]): GateCheck[] {
  if (pair.filesOnly) {
    const reason = `${pair.now.corpus} has other files`;
    return [{ figure: 'sizes, operations and speeds', verdict: 'not compared', reason }];
  }
  const ends = ['encode', 'decode'] as const;
  return [...endChecks(pair), ...ends.flatMap((end) => speedCheck(pair, end, classes))];
}
