/**
 * Peak memory of entropy by order, each case in a process of its own: orders up to 2 of 200 MB, order 4 of 8 MiB of text and
 * of noise. Bound: 1 GB each, the program and the data included.
 */
import { spawnSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { entropyByOrder } from '../src/entropy/entropy-by-order.ts';
import { SeededGenerator } from '../src/statistics/generator.ts';
import { oneMessage } from '../src/symbols/sequence.ts';

const CASES: Record<string, { size: number; upto: number; fill: (bytes: Uint8Array) => void }> = {
  'orders up to 2 of 200 MB of noise': { size: 200e6, upto: 2, fill: fillWithNoise },
  'orders up to 4 of 8 MiB of text': { size: 2 ** 23, upto: 4, fill: fillWithText },
  'orders up to 4 of 8 MiB of noise': { size: 2 ** 23, upto: 4, fill: fillWithNoise },
};

function fillWithNoise(bytes: Uint8Array): void {
  const generator = new SeededGenerator(1);
  for (let i = 0; i < bytes.length; i++) bytes[i] = generator.integer(0, 255);
}

function fillWithText(bytes: Uint8Array): void {
  const text = readFileSync(join(process.env['BITASSAY_DATASETS'] ?? '.datasets', 'moby.txt'));
  for (let at = 0; at < bytes.length; at += text.length) {
    bytes.set(text.subarray(0, bytes.length - at), at);
  }
}

function measure(name: string): void {
  const { size, upto, fill } = CASES[name];
  const bytes = new Uint8Array(size);
  fill(bytes);
  const start = process.hrtime.bigint();
  const { orders } = entropyByOrder(oneMessage(bytes, 256), { upto, contexts: 'running' });
  const seconds = Number(process.hrtime.bigint() - start) / 1e9;
  const peak = process.resourceUsage().maxRSS / 1024;
  console.log(
    `${name.padEnd(36)}${`${peak.toFixed(0)} MiB`.padStart(10)}${`${seconds.toFixed(1)} s`.padStart(9)}   H_${upto} = ${orders[upto].plugIn.toFixed(4)}`,
  );
}

const asked = process.argv[2];
if (asked !== undefined) measure(asked);
else {
  for (const name of Object.keys(CASES)) {
    const { status } = spawnSync(process.execPath, [fileURLToPath(import.meta.url), name], {
      stdio: 'inherit',
    });
    if (status !== 0) process.exitCode = 1;
  }
}
