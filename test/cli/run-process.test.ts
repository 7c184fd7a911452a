/** What only a process of its own shows of `run`: killed and resumed, interrupted once and twice, without a home. */
import { type ChildProcess, spawn } from 'node:child_process';
import { existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { RunRecord } from '../../src/harness/run-record.ts';
import { builtFile } from '../harness/built.ts';

const main = fileURLToPath(builtFile('cli/main.js'));

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-run-'));
  const lines = Array.from(
    { length: 1000 },
    (_, i) => `container ${100 + (i % 7)} supply ${-18 + ((i * i) % 5)} door ${i % 11}\n`,
  );
  writeFileSync(join(folder, 'log.txt'), lines.join(''));
  writeFileSync(join(folder, 'plan.yaml'), planOf('"arith:order=2,halve_at=1000..1011"'));
  // One cell that takes far longer than this test waits.
  const noise = new Uint8Array(3 * 2 ** 19);
  for (let i = 0, x = 1; i < noise.length; i++) {
    x = (Math.imul(x, 1664525) + 1013904223) >>> 0;
    noise[i] = x >>> 24;
  }
  writeFileSync(join(folder, 'noise.bin'), noise);
  writeFileSync(join(folder, 'slow.yaml'), planOf('"arith:order=4"', 'noise.bin', 'whole'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function planOf(candidates: string, file = 'log.txt', messages = 'lines'): string {
  return `plan: 1\ncorpora:\n  log: {files: ${file}, symbols: bytes, messages: ${messages}}\ncandidates: [${candidates}]\ntables: [learned]\nreset: [never]\ntiming: {repeats: 0}\n`;
}

interface Ended {
  readonly code: number | null;
  readonly err: string;
  readonly out: string;
}

function run(
  plan: string,
  output: string,
  env: NodeJS.ProcessEnv,
  more: readonly string[] = [],
  onStart?: (child: ChildProcess) => void,
): Promise<Ended> {
  return new Promise((resolve, reject) => {
    const child = spawn(process.execPath, [main, 'run', plan, '-o', output, ...more], {
      cwd: folder,
      stdio: ['ignore', 'pipe', 'pipe'],
      env: { ...process.env, ...env },
    });
    const text = { out: '', err: '' };
    child.stdout!.on('data', (chunk) => {
      text.out += String(chunk);
    });
    child.stderr!.on('data', (chunk) => {
      text.err += String(chunk);
    });
    child.on('error', reject);
    child.on('close', (code) => resolve({ code, ...text }));
    onStart?.(child);
  });
}

function recordIn(output: string): RunRecord {
  return JSON.parse(readFileSync(join(folder, output, 'run.json'), 'utf8')) as RunRecord;
}

/** A record without what may differ between two runs: nothing was timed here. */
function figuresOf(output: string): Omit<RunRecord, 'environment'> {
  const { environment: _, ...figures } = recordIn(output);
  return figures;
}

const messagesOf = (output: string): Record<string, string> =>
  Object.fromEntries(
    readdirSync(join(folder, output, 'messages')).map((name) => [
      name,
      readFileSync(join(folder, output, 'messages', name), 'hex'),
    ]),
  );

function entriesIn(cache: string): number {
  if (!existsSync(cache)) return 0;
  return readdirSync(cache, { recursive: true, encoding: 'utf8' }).filter((name) =>
    name.endsWith('.figures'),
  ).length;
}

describe('a run', () => {
  it('that was killed goes on where it ended, to the same record; two fresh runs give the same one too', async () => {
    const cache = join(folder, 'killed-cache');
    const env = { BITASSAY_CACHE: cache };
    const killed = await run('plan.yaml', 'killed.run', env, ['--workers', '2'], (child) => {
      const timer = setInterval(() => {
        if (entriesIn(cache) < 3) return;
        clearInterval(timer);
        child.kill('SIGKILL');
      }, 2);
      child.on('close', () => clearInterval(timer));
    });
    expect(killed.code).toBeNull();
    expect(existsSync(join(folder, 'killed.run/run.json'))).toBe(false);
    const kept = entriesIn(cache);
    expect(kept).toBeGreaterThanOrEqual(3);
    expect(kept).toBeLessThan(12);
    const resumed = await run('plan.yaml', 'killed.run', env);
    expect(resumed.code, resumed.err).toBe(0);
    expect(resumed.err).toMatch(
      new RegExp(`^bitassay: bits of ${kept} of 12 cells came from the cache`, 'm'),
    );
    const fresh = ['--fresh', '--workers'];
    const one = await run('plan.yaml', 'one.run', env, [...fresh, '1']);
    const two = await run('plan.yaml', 'two.run', env, [...fresh, '2']);
    expect([one.code, two.code]).toEqual([0, 0]);
    expect(one.err + two.err).not.toContain('cache');
    expect(figuresOf('killed.run').cells).toHaveLength(12);
    for (const output of ['one.run', 'two.run']) {
      expect(figuresOf(output)).toEqual(figuresOf('killed.run'));
      expect(messagesOf(output)).toEqual(messagesOf('killed.run'));
    }
  }, 60_000);

  it('that is interrupted twice ends at once, in the middle of a cell', async () => {
    const env = { BITASSAY_CACHE: join(folder, 'twice-cache') };
    let interrupts = 0;
    const { code, err } = await run('slow.yaml', 'slow.run', env, [], (child) => {
      child.stderr!.on('data', (chunk) => {
        const text = String(chunk);
        const isStarted = text.includes('leaves open') && interrupts === 0;
        if (!isStarted && !text.includes('Ctrl-C again')) return;
        interrupts++;
        setTimeout(() => child.kill('SIGINT'), isStarted ? 1000 : 0);
      });
    });
    expect(code, err).toBe(130);
    expect(interrupts).toBe(2);
    expect(existsSync(join(folder, 'slow.run/run.json'))).toBe(false);
  }, 60_000);

  it('goes on without a cache where there is no place for one, and says so', async () => {
    const blocked = join(folder, 'blocked');
    writeFileSync(blocked, 'a file where a folder should be');
    const { code, err } = await run('plan.yaml', 'blocked.run', { BITASSAY_CACHE: blocked });
    expect(code, err).toBe(0);
    expect(err).toMatch(/^bitassay: nothing could be kept in the cache: /m);
    expect(recordIn('blocked.run').cells.every((cell) => cell.verified)).toBe(true);
  }, 60_000);

  it('holds cells to the budget of the plan: one failed cell, exit 3, the others right', async () => {
    writeFileSync(
      join(folder, 'budget.yaml'),
      `${planOf('fixed, "arith:order=4"', 'noise.bin', 'whole')}budget: {cell_seconds: 1, cell_memory: 2GB}\n`,
    );
    const { code, out, err } = await run(
      'budget.yaml',
      'budget.run',
      { BITASSAY_CACHE: join(folder, 'budget-cache') },
      ['--json'],
    );
    expect(code, err).toBe(3);
    const { cells } = JSON.parse(out) as RunRecord;
    expect(cells.map(({ verified }) => verified)).toEqual([true, false]);
    // 8 bits each, and what the plan's lengths cost.
    expect(cells[0].rate).toBeCloseTo(8, 4);
    expect(cells[1].failure).toMatch(/^took longer than budget.cell_seconds, 1 s/);
  }, 60_000);
});

describe('try', () => {
  it('takes workers for large files, and leaves nothing in the cache', async () => {
    const cache = join(folder, 'try-cache');
    writeFileSync(
      join(folder, 'large.bin'),
      new Uint8Array(320_000).map((_, i) => i % 2 && i & 2),
    );
    const { code, out, err } = await new Promise<Ended>((resolve, reject) => {
      const args = ['try', 'large.bin', '--coder', 'fixed', '--coder', 'huffman', '--json'];
      const child = spawn(process.execPath, [main, ...args], {
        cwd: folder,
        env: { ...process.env, BITASSAY_CACHE: cache },
      });
      const text = { out: '', err: '' };
      child.stdout.on('data', (chunk) => {
        text.out += String(chunk);
      });
      child.stderr.on('data', (chunk) => {
        text.err += String(chunk);
      });
      child.on('error', reject);
      child.on('close', (code) => resolve({ code, ...text }));
    });
    expect(code, err).toBe(0);
    const { cells } = JSON.parse(out) as RunRecord;
    expect(cells.map(({ candidate, verified }) => [candidate, verified])).toEqual([
      ['fixed', true],
      ['huffman', true],
    ]);
    // Two symbols, so one bit each; the table and the count are all there is besides.
    expect(cells[1].rate).toBeGreaterThanOrEqual(1);
    expect(cells[1].rate).toBeLessThan(1.01);
    expect(existsSync(cache)).toBe(false);
  }, 60_000);
});
