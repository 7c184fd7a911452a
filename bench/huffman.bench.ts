/**
 * `huffman` against zlib's own Huffman-only coding, on 8 MiB of text as one message: encode with
 * `sent` tables (counting, code lengths and table included) against deflateRaw with Z_HUFFMAN_ONLY,
 * decode against inflateRaw of the same. Then the same coder in 32-byte messages with shipped
 * tables. Speeds are ratios: above 1 is faster than zlib.
 */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { constants, deflateRawSync, inflateRawSync } from 'node:zlib';
import { Bench, type Task } from 'tinybench';
import type { Coded, CodedInput, Setup } from '../src/coders/contract.ts';
import { huffman } from '../src/coders/huffman.ts';
import { oneMessage, type SymbolSequence } from '../src/symbols/sequence.ts';

const SIZE = 8 * 2 ** 20;
const ROUNDS = 5;

const text = readFileSync(join(process.env['BITASSAY_DATASETS'] ?? '.datasets', 'moby.txt'));
const symbols = new Uint8Array(SIZE);
for (let at = 0; at < SIZE; at += text.length) {
  symbols.set(text.subarray(0, Math.min(text.length, SIZE - at)), at);
}
const whole = oneMessage(symbols, 256);
const packets: SymbolSequence = {
  alphabetSize: 256,
  symbols,
  messageEnds: Uint32Array.from({ length: SIZE / 32 }, (_, i) => 32 * (i + 1)),
};
const coder = huffman.create({ maxbits: 24, unseen: 'add:1/2' });
const sent: Setup = {
  policy: 'sent',
  alphabetSize: 256,
  reset: 'never',
  lengths: 'sent',
  align: 8,
};

function train(setup: Setup, sequence: SymbolSequence): Setup {
  const trainer = coder.trainer!(setup);
  trainer.push(sequence);
  return { ...setup, tables: trainer.finish() };
}

function encode(setup: Setup, sequence: SymbolSequence): Coded {
  const encoder = coder.encoder(setup);
  encoder.push(sequence);
  return encoder.finish();
}

function decode(setup: Setup, input: CodedInput): number {
  return coder.decoder(setup, { maxSymbols: SIZE }).decode(input).sequence.symbols[SIZE - 1];
}

const shipped = train({ ...sent, policy: 'shipped', reset: 'message' }, packets);
const deflated = deflateRawSync(symbols, { strategy: constants.Z_HUFFMAN_ONLY });
const coded = encode(train(sent, whole), whole);
const codedPackets = encode(shipped, packets);

// What every task returns is summed, so that no work can be dropped.
let kept = 0;
const bench = new Bench({ iterations: 4, time: 0, warmupIterations: 1, warmupTime: 0 });
const tasks: [string, string, () => number][] = [
  [
    'deflate encode',
    '',
    () => deflateRawSync(symbols, { strategy: constants.Z_HUFFMAN_ONLY }).length,
  ],
  [
    'encode, sent, one message',
    'deflate encode',
    () => encode(train(sent, whole), whole).bytes.length,
  ],
  [
    'encode, shipped, 32-byte messages',
    'deflate encode',
    () => encode(shipped, packets).bytes.length,
  ],
  ['inflate decode', '', () => inflateRawSync(deflated).length],
  [
    'decode, sent, one message',
    'inflate decode',
    () => decode(sent, { bytes: coded.bytes, messageCount: 1 }),
  ],
  [
    'decode, shipped, 32-byte messages',
    'inflate decode',
    () => decode(shipped, { bytes: codedPackets.bytes, messageCount: SIZE / 32 }),
  ],
];
for (const [name, , run] of tasks) {
  bench.add(name, () => {
    kept += run();
  });
}

/** The median time of a task in one round, in milliseconds. */
function medianOf(task: Task): number {
  const { result } = task;
  if (!('latency' in result)) throw new Error(`${task.name} did not run: ${result.state}`);
  return result.latency.p50;
}

const times = new Map<string, number[]>(tasks.map(([name]) => [name, []]));
for (let round = 0; round < ROUNDS; round++) {
  bench.reset();
  await bench.run();
  for (const task of bench.tasks) times.get(task.name)!.push(medianOf(task));
}

console.log(
  `${'task'.padEnd(36)}${'ms'.padStart(8)}${'speed'.padStart(9)}   least to most of ${ROUNDS}`,
);
for (const [name, pacer] of tasks) {
  const own = times.get(name)!;
  const middle = own.toSorted((a, b) => a - b)[Math.floor(ROUNDS / 2)];
  let line = `${name.padEnd(36)}${middle.toFixed(1).padStart(8)}`;
  if (pacer !== '') {
    const ratios = times
      .get(pacer)!
      .map((time, i) => time / own[i])
      .sort((a, b) => a - b);
    line += `${`×${ratios[Math.floor(ROUNDS / 2)].toFixed(2)}`.padStart(9)}   ${ratios[0].toFixed(2)} to ${ratios[ROUNDS - 1].toFixed(2)}`;
  }
  console.log(line);
}
console.log(`coded ${coded.bytes.length} bytes, deflate ${deflated.length} (check ${kept})`);
