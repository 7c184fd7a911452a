/** What only a process of its own shows: broken pipes, full disks behind standard output, errors outside of any command. */
import { spawn } from 'node:child_process';
import { closeSync, mkdtempSync, openSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { exitCodes } from '../../src/cli/exit.ts';

const main = fileURLToPath(new URL('../../dist/cli/main.js', import.meta.url));
const exitModule = new URL('../../dist/cli/exit.js', import.meta.url);

let folder: string;
let big: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-exit-'));
  big = join(folder, 'big.bin');
  // More than any pipe holds.
  writeFileSync(big, Buffer.alloc(4_000_000, 'supply -18.3, '));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

interface Ended {
  readonly code: number | null;
  readonly err: string;
}

function run(args: string[], stdout: 'pipe' | number, onOutput?: (end: () => void) => void) {
  return new Promise<Ended>((resolve, reject) => {
    const child = spawn(process.execPath, args, { stdio: ['ignore', stdout, 'pipe'] });
    let err = '';
    child.stderr!.on('data', (chunk) => {
      err += String(chunk);
    });
    child.stdout?.once('data', () => onOutput?.(() => child.stdout!.destroy()));
    child.on('error', reject);
    child.on('close', (code) => resolve({ code, err }));
  });
}

describe('the program ends', () => {
  it('quietly with 0 when the reader of its output has seen enough', async () => {
    const args = [main, 'encode', big, '-o', '-', '--coder', 'fixed'];
    const { code, err } = await run(args, 'pipe', (end) => end());
    expect(code).toBe(exitCodes.done);
    expect(err).not.toContain('EPIPE');
    expect(err).not.toContain('bitassay:');
  });

  it('with 4 when the disk behind its output is full', async () => {
    const full = openSync('/dev/full', 'w');
    try {
      for (const args of [['encode', big, '-o', '-', '--coder', 'fixed'], ['coders']]) {
        const { code, err } = await run([main, ...args], full);
        expect(code).toBe(exitCodes.environment);
        expect(err).toMatch(/^bitassay: the disk is full/);
      }
    } finally {
      closeSync(full);
    }
  });

  it('with 2 for a bad command line, with one hint', async () => {
    const { code, err } = await run([main, 'encode', big], 'pipe');
    expect(code).toBe(exitCodes.badInput);
    expect(err).toContain('--output');
  });

  it('with 70, not with the 1 of Node, when an error escapes every command', async () => {
    const script = join(folder, 'escape.mjs');
    writeFileSync(
      script,
      `import { watchProcess } from ${JSON.stringify(exitModule.href)};
watchProcess();
setTimeout(() => { throw new TypeError('nobody waits for me'); }, 1);
`,
    );
    const { code, err } = await run([script], 'pipe');
    expect(code).toBe(exitCodes.ownBug);
    expect(err).toMatch(/fault of bitassay itself: nobody waits for me/);
    expect(err).not.toContain('escape.mjs:');
  });
});
