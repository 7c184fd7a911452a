/**
 * Filling messages, as a multiple of the processor time of a plain encode of the same messages, in turn in one run: the demo's telemetry,
 * repeated to up to 12 MB (units of 24 bytes), in messages of so many coded bytes; tables from the first half of the demo's
 * file. A smaller share of it for coders that reset a model.
 */
import { readFileSync } from 'node:fs';
import { parseCandidate } from '../src/coders/candidate.ts';
import type { Coded, Coder, Setup } from '../src/coders/contract.ts';
import { parsePlan } from '../src/corpus/plan.ts';
import type { SymbolSequence } from '../src/symbols/sequence.ts';

const UNIT = 24;
const { record } = parsePlan(readFileSync('corpora-demo/plan.yaml', 'utf8'), 'plan.yaml')
  .corpora[0];
if (record === undefined) throw new Error('the demo has no record');
const file = new Uint8Array(readFileSync('corpora-demo/telemetry.bin'));

/** So many units: the file, as often as it takes. */
function units(count: number): SymbolSequence {
  const symbols = new Uint8Array(count * UNIT);
  for (let at = 0; at < symbols.length; at += file.length)
    symbols.set(file.subarray(0, symbols.length - at), at);
  const messageEnds = Uint32Array.from({ length: count }, (_, i) => (i + 1) * UNIT);
  return { alphabetSize: 256, symbols, messageEnds };
}

function encode(coder: Coder, setup: Setup, sequence: SymbolSequence): Coded {
  const encoder = coder.encoder(setup);
  encoder.push(sequence);
  return encoder.finish();
}

const ROUNDS = 9;
let kept = 0;

/** Milliseconds of processor time: other work on the machine disturbs it less than the clock's. */
function timed(coder: Coder, setup: Setup, sequence: SymbolSequence): number {
  const start = process.cpuUsage();
  kept += encode(coder, setup, sequence).bytes.length;
  const { user, system } = process.cpuUsage(start);
  return (user + system) / 1e3;
}

function middle(values: readonly number[]): number {
  return values.toSorted((a, b) => a - b)[Math.floor(values.length / 2)];
}

console.log(
  'candidate                            units  units/message   plain  filled (MB/s)  time ×',
);
for (const [candidate, policy, unitCount, bytes] of [
  ['huffman', 'shipped', 500_000, 192],
  ['huffman', 'shipped', 500_000, 1400],
  ['arith:order=0', 'shipped', 200_000, 192],
  ['arith:order=1', 'shipped', 100_000, 192],
  ['arith:order=1', 'learned', 50_000, 192],
  ['arith:order=1', 'primed', 50_000, 192],
  ['fields:auto', 'shipped', 200_000, 192],
  ['fields:auto', 'primed', 50_000, 192],
  ['fixed', 'none', 500_000, 384],
  ['rice:k=4', 'none', 200_000, 400],
  ['rice', 'shipped', 200_000, 400],
  ['rice', 'learned', 200_000, 400],
  ['golomb', 'shipped', 200_000, 400],
  ['exp-golomb', 'shipped', 200_000, 400],
  ['block-huffman:n=2', 'shipped', 100_000, 192],
  ['block-huffman:n=2', 'shipped', 100_000, 400],
] as const) {
  const coder = parseCandidate(candidate).create();
  const base: Setup = {
    policy,
    alphabetSize: 256,
    reset: 'message',
    lengths: 'link',
    align: 8,
    record,
    fill: { bytes },
    unitSymbols: UNIT,
  };
  const trainer = policy === 'shipped' || policy === 'primed' ? coder.trainer?.(base) : undefined;
  trainer?.push({
    alphabetSize: 256,
    symbols: file.subarray(0, file.length / 2),
    messageEnds: Uint32Array.from({ length: file.length / 2 / UNIT }, (_, i) => (i + 1) * UNIT),
  });
  const setup = trainer === undefined ? base : { ...base, tables: trainer.finish() };
  const { fill: _, ...plain } = setup;
  const sequence = units(unitCount);
  const { symbolEnds } = encode(coder, setup, sequence);
  const messages = { ...sequence, messageEnds: symbolEnds! };
  const plainTimes: number[] = [];
  const filledTimes: number[] = [];
  for (let round = -1; round < ROUNDS; round++) {
    const one = timed(coder, plain, messages);
    const other = timed(coder, setup, sequence);
    if (round < 0) continue;
    plainTimes.push(one);
    filledTimes.push(other);
  }
  const speed = (times: number[]) =>
    ((unitCount * UNIT) / 1e3 / middle(times)).toFixed(1).padStart(7);
  const ratio = middle(filledTimes.map((time, i) => time / plainTimes[i]));
  console.log(
    `${`${candidate} ${policy} fill=${bytes}`.padEnd(34)}${String(unitCount).padStart(8)}` +
      `${(unitCount / symbolEnds!.length).toFixed(1).padStart(15)} ${speed(plainTimes)} ${speed(filledTimes)}` +
      `        ${ratio.toFixed(2).padStart(6)}`,
  );
}
console.log(`(kept ${kept})`);
