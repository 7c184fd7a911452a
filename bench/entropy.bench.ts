/**
 * Entropy by order, k ≤ 6, by plug-in, Miller–Madow, Grassberger, Chao–Shen and NSB together, against zlib's deflate at level
 * 6 on the same 8 MiB: of text (the open text files one after another, begun anew until full), and of seeded noise, on
 * which sorting is slowest. Bound: 12 deflates. Beside it, without a bound, match lengths and the block view.
 */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { deflateRawSync } from 'node:zlib';
import { Bench, type Task } from 'tinybench';
import { blockView } from '../src/entropy/block-view.ts';
import { entropyByOrder } from '../src/entropy/entropy-by-order.ts';
import { measureMatches } from '../src/entropy/match-measurements.ts';
import { SeededGenerator } from '../src/statistics/generator.ts';
import { oneMessage } from '../src/symbols/sequence.ts';

const SIZE = 8 * 2 ** 20;
const ROUNDS = 3;
const FILES = [
  'moby.txt',
  'brown-words.txt',
  'lodash.js',
  'udhr.html',
  'quakes.json',
  'flights.ndjson',
  'weather.csv',
];

function text(): Uint8Array {
  const folder = process.env['BITASSAY_DATASETS'] ?? '.datasets';
  const parts = Buffer.concat(FILES.map((name) => readFileSync(join(folder, name))));
  const bytes = new Uint8Array(SIZE);
  for (let at = 0; at < SIZE; at += parts.length) bytes.set(parts.subarray(0, SIZE - at), at);
  return bytes;
}

function noise(): Uint8Array {
  const generator = new SeededGenerator(1);
  return new Uint8Array(SIZE).map(() => generator.integer(0, 255));
}

// What every task returns is summed, so that no work can be dropped.
let kept = 0;
const bench = new Bench({ iterations: 2, time: 0, warmupIterations: 1, warmupTime: 0 });
const inputs = { text: text(), noise: noise() };
for (const [name, bytes] of Object.entries(inputs)) {
  bench.add(`deflate ${name}`, () => {
    kept += deflateRawSync(bytes, { level: 6 }).length;
  });
  for (const upto of [2, 6]) {
    bench.add(`orders 0 to ${upto} of ${name}`, () => {
      const { orders } = entropyByOrder(oneMessage(bytes, 256), {
        upto,
        contexts: 'running',
        all: true,
      });
      kept += orders[upto].plugIn + orders[upto].estimates!.chaoShen;
    });
  }
  bench.add(`match lengths of ${name}`, () => {
    kept += measureMatches(oneMessage(bytes, 256), 2).matchSum;
  });
  bench.add(`block view of ${name}`, () => {
    kept += blockView(oneMessage(bytes, 256)).length;
  });
}

/** The median time of a task in one round, in milliseconds. */
function medianOf(task: Task): number {
  const { result } = task;
  if (!('latency' in result)) throw new Error(`${task.name} did not run: ${result.state}`);
  return result.latency.p50;
}

const times = new Map<string, number[]>(bench.tasks.map((task) => [task.name, []]));
for (let round = 0; round < ROUNDS; round++) {
  bench.reset();
  await bench.run();
  for (const task of bench.tasks) times.get(task.name)!.push(medianOf(task));
}

console.log(
  `${'task'.padEnd(24)}${'ms'.padStart(8)}${'deflates'.padStart(10)}   least to most of ${ROUNDS}`,
);
for (const [name, own] of times) {
  const middle = own.toSorted((a, b) => a - b)[Math.floor(ROUNDS / 2)];
  let line = `${name.padEnd(24)}${middle.toFixed(0).padStart(8)}`;
  const pacer = times.get(`deflate ${name.split(' ').at(-1)}`)!;
  if (pacer !== own) {
    const ratios = own.map((time, i) => time / pacer[i]).sort((a, b) => a - b);
    line += `${ratios[Math.floor(ROUNDS / 2)].toFixed(1).padStart(10)}   ${ratios[0].toFixed(1)} to ${ratios[ROUNDS - 1].toFixed(1)}`;
  }
  console.log(line);
}
console.log(`(check ${kept})`);
