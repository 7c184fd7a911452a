/** `bitassay entropy` as a user meets it: what is on the screen by default, with `--all`, `--rough` and `--ascii`. */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';

const main = fileURLToPath(new URL('../../dist/cli/main.js', import.meta.url));

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-entropy-'));
  let text = '';
  for (let i = 0; i < 600; i++)
    text += `unit ${4700 + (i % 9)} supply ${-1830 + ((i * 7919) % 97)}\n`;
  writeFileSync(join(folder, 'supply.log'), text);
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function entropy(...args: string[]): { code: number | null; out: string; err: string } {
  const { status, stdout, stderr } = spawnSync(
    process.execPath,
    [main, 'entropy', 'supply.log', ...args],
    { cwd: folder, encoding: 'utf8' },
  );
  return { code: status, out: stdout, err: stderr };
}

describe('entropy', () => {
  it('shows orders, plot, floor, ceilings, change and how much data, within 100 columns', () => {
    const { code, out, err } = entropy();
    expect(err).toBe('');
    expect(code).toBe(0);
    for (const part of [
      /order +corrected +95 % interval/,
      /order 0 │/,
      /Floor, an estimate: ≈ \d/,
      /Ceilings, .* bounds/,
      /ctw:depth=6 \d/,
      /Change along the data/,
      /How much data/,
      /no lower bound/,
    ]) {
      expect(out.replace(/\n +/g, ' ')).toMatch(part);
    }
    expect(out).not.toMatch(/Grassberger|Blocks of n/);
    expect(out).not.toContain('\u001b');
    expect(out.split('\n').every((line) => [...line].length <= 100)).toBe(true);
  });

  it('shows the other estimators and blocks with --all', () => {
    const { out } = entropy('--all', '--rough');
    expect(out).toMatch(/plug-in +Grassberger +Chao–Shen +NSB/);
    expect(out).toMatch(/Blocks of n/);
  });

  it('runs no coder with --rough, and says that it did not', () => {
    const { code, out } = entropy('--rough');
    expect(code).toBe(0);
    expect(out.replace(/\n +/g, ' ')).toContain('since no coder was run');
    expect(out).not.toMatch(/arith:order|ctw:/);
  });

  it('keeps to ASCII with --ascii', () => {
    // biome-ignore lint/suspicious/noControlCharactersInRegex: all of ASCII is meant
    expect(entropy('--rough', '--all', '--ascii').out).toMatch(/^[\x00-\x7f]*$/);
  });

  it('says what resolving a difference takes, and refuses one of nothing', () => {
    expect(entropy('--resolve', '0.25').out).toMatch(/A difference of 0\.250 bits\/byte/);
    expect(entropy('--resolve', '0').code).toBe(2);
  });
});
