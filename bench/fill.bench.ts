/**
 * Filling messages, as a multiple of the time of a plain encode of the same messages in the same run: the demo's telemetry,
 * repeated to 24 MB (a million units of 24 bytes), in messages of at most 192 coded bytes; tables from the first half of the
 * demo's file. A smaller share of it for coders that are tried at several lengths, and for those that reset a model.
 */
import { readFileSync } from 'node:fs';
import { Bench } from 'tinybench';
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

let kept = 0;
const bench = new Bench({
  iterations: 5,
  time: 0,
  warmup: true,
  warmupIterations: 1,
  warmupTime: 0,
});
const rows: { name: string; unitCount: number; messages: number }[] = [];
for (const [candidate, policy, unitCount, bytes] of [
  ['huffman', 'shipped', 1_000_000, 192],
  ['huffman', 'shipped', 1_000_000, 1400],
  ['arith:order=0', 'shipped', 200_000, 192],
  ['arith:order=1', 'shipped', 200_000, 192],
  ['arith:order=1', 'learned', 50_000, 192],
  ['arith:order=1', 'primed', 50_000, 192],
  ['fields:auto', 'shipped', 500_000, 192],
  ['fields:auto', 'primed', 50_000, 192],
  ['rice:k=4', 'none', 100_000, 400],
  ['block-huffman:n=2', 'shipped', 50_000, 192],
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
  const name = `${candidate} ${policy} fill=${bytes}`;
  rows.push({ name, unitCount, messages: symbolEnds!.length });
  bench.add(`${name} filled`, () => {
    kept += encode(coder, setup, sequence).bytes.length;
  });
  bench.add(`${name} plain`, () => {
    kept += encode(coder, plain, messages).bytes.length;
  });
}
await bench.run();

/** Median time of a task, in ms. */
function medianOf(name: string): number {
  const result = bench.getTask(name)?.result;
  if (result === undefined || !('latency' in result)) throw new Error(`${name} did not run`);
  return result.latency.p50;
}

console.log(
  'candidate                            units  units/message   plain  filled (MB/s)  time ×',
);
for (const { name, unitCount, messages } of rows) {
  const plain = medianOf(`${name} plain`);
  const filled = medianOf(`${name} filled`);
  const speed = (time: number) => ((unitCount * UNIT) / 1e3 / time).toFixed(1).padStart(7);
  console.log(
    `${name.padEnd(34)}${String(unitCount).padStart(8)}${(unitCount / messages).toFixed(1).padStart(15)}` +
      ` ${speed(plain)} ${speed(filled)}        ${(filled / plain).toFixed(2).padStart(6)}`,
  );
}
console.log(`(kept ${kept})`);
