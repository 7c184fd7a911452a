/**
 * fields on records, as a share of zlib's Huffman-only coder in the same run: the demo's telemetry,
 * repeated to 6 MB, in messages of 8 records and as one message; choices by auto, tables from the
 * first half of the demo's file.
 */
import { readFileSync } from 'node:fs';
import { constants, deflateRawSync, inflateRawSync } from 'node:zlib';
import { Bench } from 'tinybench';
import type { Coded, Coder, Setup } from '../src/coders/contract.ts';
import { fields } from '../src/coders/fields.ts';
import { resolveParameters } from '../src/coders/parameters.ts';
import { parsePlan } from '../src/corpus/plan.ts';
import type { SymbolSequence } from '../src/symbols/sequence.ts';

const SIZE = 6_000_000;
const { record } = parsePlan(readFileSync('corpora-demo/plan.yaml', 'utf8'), 'plan.yaml')
  .corpora[0];
if (record === undefined) throw new Error('the demo has no record');
const recordBytes = record.bytes;
const file = new Uint8Array(readFileSync('corpora-demo/telemetry.bin'));
const data = new Uint8Array(SIZE);
for (let at = 0; at < SIZE; at += file.length) data.set(file.subarray(0, SIZE - at), at);

function messages(symbols: Uint8Array, records: number): SymbolSequence {
  const ends: number[] = [];
  for (let at = records * recordBytes; at < symbols.length; at += records * recordBytes)
    ends.push(at);
  return { alphabetSize: 256, symbols, messageEnds: Uint32Array.from([...ends, symbols.length]) };
}

let kept = 0;

function encode(coder: Coder, setup: Setup, sequence: SymbolSequence): Coded {
  const encoder = coder.encoder(setup);
  encoder.push(sequence);
  return encoder.finish();
}

const bench = new Bench({
  iterations: 5,
  time: 0,
  warmup: true,
  warmupIterations: 2,
  warmupTime: 0,
});
const deflated = deflateRawSync(data, { strategy: constants.Z_HUFFMAN_ONLY });
bench.add('zlib encode', () => {
  kept += deflateRawSync(data, { strategy: constants.Z_HUFFMAN_ONLY }).length;
});
bench.add('zlib decode', () => {
  kept += inflateRawSync(deflated).length;
});
const rows: { name: string; bytes: number }[] = [];
for (const [candidate, policy, records] of [
  ['48', 'shipped', 8],
  ['48', 'shipped', SIZE],
  ['32', 'shipped', 8],
  ['48', 'primed', 8],
] as const) {
  const values = resolveParameters('fields', fields.declaration.parameters, { range: candidate });
  const coder = fields.create(values);
  const base: Setup = {
    policy,
    alphabetSize: 256,
    reset: 'message',
    lengths: 'link',
    align: 8,
    record,
  };
  const trainer = coder.trainer!(base);
  trainer.push(messages(file.subarray(0, file.length / 2), 8));
  const setup = { ...base, tables: trainer.finish() };
  const sequence = messages(data, records);
  const coded = encode(coder, setup, sequence);
  const name = `range=${candidate} ${policy} ${records === SIZE ? 'one message' : `records=${records}`}`;
  rows.push({ name, bytes: coded.bytes.length });
  bench.add(`${name} encode`, () => {
    kept += encode(coder, setup, sequence).bytes.length;
  });
  const decoder = coder.decoder(setup, { maxSymbols: SIZE });
  const { bytes, messageEndsBits } = coded;
  const messageCount = sequence.messageEnds.length;
  bench.add(`${name} decode`, () => {
    kept += decoder.decode({ bytes, messageEndsBits, messageCount }).bitsConsumed;
  });
}
await bench.run();

/** Median time of a task, in ms. */
function medianOf(name: string): number {
  const result = bench.getTask(name)?.result;
  if (result === undefined || !('latency' in result)) throw new Error(`${name} did not run`);
  return result.latency.p50;
}

const zlib = { encode: medianOf('zlib encode'), decode: medianOf('zlib decode') };
const speed = (time: number) => (SIZE / 1e3 / time).toFixed(1).padStart(8);
console.log(`zlib, Huffman only: ${speed(zlib.encode)} MB/s encode,${speed(zlib.decode)} decode`);
console.log(
  'candidate                        coded bytes   encode  ÷ zlib   decode  ÷ zlib   (MB/s)',
);
for (const { name, bytes } of rows) {
  const figures = (['encode', 'decode'] as const).map((end) => {
    const time = medianOf(`${name} ${end}`);
    return `${speed(time)} ${(zlib[end] / time).toFixed(3).padStart(7)}`;
  });
  console.log(`${name.padEnd(32)}${String(bytes).padStart(12)} ${figures.join(' ')}`);
}
console.log(`(kept ${kept})`);
