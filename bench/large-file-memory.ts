/**
 * Peak memory of data that memory must not hold, each case in a process of its own: entropy of orders 0 to 2, huffman and
 * arith of orders 0 to 2, learned, under a bound of 512 MB. The file is made in the system's folder for temporary files and
 * removed: 256 MB of lines of a tracker, or as many bytes as BITASSAY_LARGE_FILE says, as in 2GB.
 */
import { spawnSync } from 'node:child_process';
import { closeSync, mkdtempSync, openSync, rmSync, writeSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { parseCandidate } from '../src/coders/candidate.ts';
import { parseByteSize } from '../src/corpus/byte-size.ts';
import { streamedEntropyReport } from '../src/harness/stream-entropy.ts';
import { boundedRequest, openStreamed } from '../src/harness/stream-request.ts';
import { runStreamed } from '../src/harness/stream-run.ts';
import { SeededGenerator } from '../src/statistics/generator.ts';

const MEMORY_BYTES = 512e6;
const CASES = ['entropy', 'huffman', 'arith:order=0', 'arith:order=1', 'arith:order=2'];

function makeFile(path: string, byteCount: number): void {
  const generator = new SeededGenerator(1);
  const file = openSync(path, 'w');
  let supply = -1830;
  let written = 0;
  while (written < byteCount) {
    let text = '';
    for (let i = 0; i < 20_000; i++) {
      supply += generator.integer(-6, 6);
      text += `unit ${4700 + generator.integer(0, 8)} supply ${supply} humidity ${generator.integer(30, 99)}\n`;
    }
    const bytes = Buffer.from(text).subarray(0, byteCount - written);
    written += writeSync(file, bytes);
  }
  closeSync(file);
}

async function measure(name: string, file: string): Promise<void> {
  const start = process.hrtime.bigint();
  const spec = { name: 'tracker', files: [file], symbols: 'bytes', messages: 'whole' };
  const corpora = await openStreamed([spec], '/', undefined, MEMORY_BYTES);
  let found: string;
  if (name === 'entropy') {
    const { entropy } = await streamedEntropyReport(corpora, { upto: 2, all: false });
    found = `H_2 = ${entropy[0].orders[2].plug_in.toFixed(4)}`;
  } else {
    const { record } = await runStreamed(
      boundedRequest({
        title: name,
        corpora,
        candidates: [parseCandidate(name)],
        policies: [name === 'huffman' ? 'sent' : 'learned'],
        resets: ['message'],
        align: 8,
        split: 'none',
        memoryBytes: MEMORY_BYTES,
      }),
    );
    const [cell] = record.cells;
    found = cell.failure ?? `${cell.rate!.toFixed(4)} bits/byte, ${cell.coded_bytes} bytes`;
  }
  const seconds = Number(process.hrtime.bigint() - start) / 1e9;
  const peak = process.resourceUsage().maxRSS / 1024;
  console.log(
    `${name.padEnd(16)}${`${peak.toFixed(0)} MiB`.padStart(9)}${`${seconds.toFixed(0)} s`.padStart(8)}   ${found}`,
  );
}

const [asked, file] = process.argv.slice(2);
if (asked !== undefined) await measure(asked, file);
else {
  const folder = mkdtempSync(join(tmpdir(), 'bitassay-large-'));
  try {
    const path = join(folder, 'tracker.log');
    makeFile(path, parseByteSize(process.env['BITASSAY_LARGE_FILE'] ?? '256MB'));
    for (const name of CASES) {
      const child = [fileURLToPath(import.meta.url), name, path];
      if (spawnSync(process.execPath, child, { stdio: 'inherit' }).status !== 0)
        process.exitCode = 1;
    }
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}
