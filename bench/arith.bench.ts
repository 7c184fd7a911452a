/**
 * arith on 8 MiB of text, as a share of zlib's Huffman-only coder in the same run: pure order 0 and 2, back-off orders 0 to 4.
 * Whole file in one message, chunks of 64 KiB, policy learned, both precisions for one of them.
 */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { constants, deflateRawSync, inflateRawSync } from 'node:zlib';
import { Bench } from 'tinybench';
import { arith } from '../src/coders/arith.ts';
import type { Coded, Coder, Setup } from '../src/coders/contract.ts';
import { resolveParameters } from '../src/coders/parameters.ts';
import type { SymbolChunk } from '../src/symbols/sequence.ts';

const SIZE = 8 * 2 ** 20;
const CHUNK = 2 ** 16;
const FILES = ['moby.txt', 'brown-words.txt'];

const folder = process.env['BITASSAY_DATASETS'];
if (folder === undefined) throw new Error('set BITASSAY_DATASETS, or start with npm run bench');
const parts = FILES.map((name) => readFileSync(join(folder, name)));
const text = new Uint8Array(SIZE);
for (let at = 0, i = 0; at < SIZE; i++) {
  const part = parts[i % parts.length].subarray(0, SIZE - at);
  text.set(part, at);
  at += part.length;
}

const setup: Setup = {
  policy: 'learned',
  alphabetSize: 256,
  reset: 'never',
  lengths: 'link',
  align: 8,
};

function chunks(): SymbolChunk[] {
  const list: SymbolChunk[] = [];
  for (let at = 0; at < SIZE; at += CHUNK) {
    const symbols = text.subarray(at, at + CHUNK);
    const last = at + CHUNK >= SIZE;
    list.push({
      alphabetSize: 256,
      symbols,
      messageEnds: last ? Uint32Array.of(symbols.length) : new Uint32Array(0),
      ...(last ? {} : { openSymbolCount: SIZE }),
    });
  }
  return list;
}

const input = chunks();
let kept = 0;

function encode(coder: Coder): Coded {
  const encoder = coder.encoder(setup);
  for (const chunk of input) encoder.push(chunk);
  return encoder.finish();
}

const candidates = process.argv.slice(2).length
  ? process.argv.slice(2)
  : [
      'order=0,backoff=none,counts=kt',
      'order=2,backoff=none,counts=kt',
      'order=0',
      'order=1',
      'order=2',
      'order=2,range=32',
      'order=3',
      'order=4',
    ];

const bench = new Bench({
  iterations: 3,
  time: 0,
  warmup: true,
  warmupIterations: 1,
  warmupTime: 0,
});
const deflated = deflateRawSync(text, { strategy: constants.Z_HUFFMAN_ONLY });
bench.add('zlib encode', () => {
  kept += deflateRawSync(text, { strategy: constants.Z_HUFFMAN_ONLY }).length;
});
bench.add('zlib decode', () => {
  kept += inflateRawSync(deflated).length;
});
const sizes = new Map<string, number>();
for (const name of candidates) {
  const given = Object.fromEntries(name.split(',').map((pair) => pair.split('=')));
  const coder = arith.create(resolveParameters('arith', arith.declaration.parameters, given));
  const coded = encode(coder);
  sizes.set(name, coded.bytes.length);
  bench.add(`${name} encode`, () => {
    kept += encode(coder).bytes.length;
  });
  const decoder = coder.decoder(setup, { maxSymbols: SIZE });
  bench.add(`${name} decode`, () => {
    const { bytes, messageEndsBits } = coded;
    kept += decoder.decode({ bytes, messageEndsBits, messageCount: 1 }).bitsConsumed;
  });
}
await bench.run();

/** Median time of a task, in ms. */
function medianOf(name: string): number {
  const task = bench.getTask(name);
  const result = task?.result;
  if (result === undefined || !('latency' in result)) throw new Error(`${name} did not run`);
  return result.latency.p50;
}

const zlibEncode = medianOf('zlib encode');
const zlibDecode = medianOf('zlib decode');
console.log(
  `zlib, Huffman only: ${(SIZE / 1e3 / zlibEncode).toFixed(0)} MB/s encode, ${(SIZE / 1e3 / zlibDecode).toFixed(0)} decode`,
);
console.log(
  'candidate                          coded bytes   encode  ÷ zlib   decode  ÷ zlib   (MB/s)',
);
for (const [name, bytes] of sizes) {
  const encodeTime = medianOf(`${name} encode`);
  const decodeTime = medianOf(`${name} decode`);
  const figures = [
    (SIZE / 1e3 / encodeTime).toFixed(1).padStart(8),
    (zlibEncode / encodeTime).toFixed(3).padStart(7),
    (SIZE / 1e3 / decodeTime).toFixed(1).padStart(8),
    (zlibDecode / decodeTime).toFixed(3).padStart(7),
  ];
  console.log(`${name.padEnd(34)}${String(bytes).padStart(12)} ${figures.join(' ')}`);
}
console.log(`(kept ${kept})`);
