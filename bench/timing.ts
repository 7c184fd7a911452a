/**
 * What a verdict on speed says on this machine as it is now: a coder against itself, and against itself with 10 % more to do.
 * Each side is timed as a run times a cell, by rounds of 20 turns with the pacer. Nothing is asserted: on a busy machine
 * intervals are wide, and marked where the pacer itself was uneven.
 */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { parseCandidate } from '../src/coders/candidate.ts';
import type { Setup } from '../src/coders/contract.ts';
import { trainOn } from '../src/coders/verify.ts';
import { longestEndSeconds } from '../src/harness/time-cell.ts';
import { Pacer } from '../src/harness/time-pacer.ts';
import { timeRounds } from '../src/harness/time-rounds.ts';
import { type TimedTask, threadClock } from '../src/harness/time-sampler.ts';
import { compareSpeeds, type PacedSamples } from '../src/statistics/speed-verdict.ts';
import { oneMessage } from '../src/symbols/sequence.ts';

const SIZE = 100_000;
const TRIALS = 6;
const REPEATS = 20;

const text = readFileSync(join(process.env['BITASSAY_DATASETS'] ?? '.datasets', 'moby.txt'));
const whole = (symbolCount: number) =>
  oneMessage(new Uint8Array(text.subarray(0, symbolCount)), 256);
const candidate = parseCandidate('huffman');
const coder = candidate.create();
const base: Setup = {
  policy: 'shipped',
  alphabetSize: 256,
  reset: 'message',
  lengths: 'sent',
  align: 8,
};
const setup: Setup = { ...base, tables: trainOn(candidate, base, whole(SIZE))! };
// What every run returns is summed, so that no work can be dropped.
let kept = 0;

function encoding(symbolCount: number): TimedTask {
  const sequence = whole(symbolCount);
  return {
    run: () => {
      const encoder = coder.encoder(setup);
      encoder.push(sequence);
      kept += encoder.finish().bytes.length;
    },
  };
}

const pacer = new Pacer('deflate-huffman', whole(SIZE));

function timed(task: TimedTask, seed: string): PacedSamples & { spread: number } {
  const round = timeRounds(
    pacer.encode,
    task,
    [],
    {
      repeats: REPEATS,
      sideTurns: 0,
      shortestSeconds: 0.02,
      shortestSideSeconds: 0.005,
      longestSeconds: 0.2,
      leastTurns: 3,
      mostRounds: 3,
      seconds: longestEndSeconds(REPEATS),
      seed,
    },
    threadClock,
  );
  return {
    seconds: round.candidate,
    pacerSeconds: round.pacer,
    unsteady: round.unsteady,
    spread: round.spread,
  };
}

for (const [name, symbolCount] of [
  ['itself', SIZE],
  ['itself with 10 % more to do', 1.1 * SIZE],
] as const) {
  console.log(`  against ${name}: how many times as long, 99 % interval, verdict`);
  for (let trial = 0; trial < TRIALS; trial++) {
    const first = timed(encoding(SIZE), `${name} ${trial} first`);
    const second = timed(encoding(symbolCount), `${name} ${trial} second`);
    const { ratio, low, high, verdict, unsteady } = compareSpeeds(first, second);
    const spread = Math.max(first.spread, second.spread);
    console.log(
      `    ${ratio.toFixed(3)}  ${low.toFixed(3)} to ${high.toFixed(3)}  ${verdict.padEnd(9)}` +
        `  95th percentile of the pacer by its median: ${spread.toFixed(2)}${unsteady ? ', unsteady' : ''}`,
    );
  }
}
if (kept < 0) console.log(kept);
