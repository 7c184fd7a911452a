/** The README's example runs, and its commands and plan are ones that the program takes. */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { buildProgram } from '../src/cli/program.ts';
import { parsePlan } from '../src/corpus/plan.ts';

const readme = readFileSync(new URL('../README.md', import.meta.url), 'utf8');

const blocksOf = (language: string): string[] =>
  [...readme.matchAll(new RegExp(`^\`\`\`${language}\n(.*?)^\`\`\``, 'gms'))].map((m) => m[1]);

describe('the README', () => {
  it('has a library example that runs against the built package', () => {
    const [example] = blocksOf('ts');
    const built = new URL('../dist/index.js', import.meta.url).href;
    const folder = mkdtempSync(join(tmpdir(), 'bitassay-readme-'));
    try {
      const file = join(folder, 'example.mjs');
      writeFileSync(file, example.replace("'bitassay'", `'${built}'`).replaceAll(' as const', ''));
      const { status, stdout, stderr } = spawnSync(process.execPath, [file], { encoding: 'utf8' });
      expect(stderr).toBe('');
      expect(status).toBe(0);
      expect(stdout).toMatch(/writtenBits: \d+/);
      // H_0 of 1 2 1 3 1 2 1 1, by hand: five 1s, two 2s, one 3 of eight.
      const entropy =
        -(5 / 8) * Math.log2(5 / 8) - (2 / 8) * Math.log2(2 / 8) - (1 / 8) * Math.log2(1 / 8);
      expect(Number(stdout.trim().split('\n').at(-1))).toBeCloseTo(entropy, 12);
    } finally {
      rmSync(folder, { recursive: true, force: true });
    }
  });

  it('has a plan that the program accepts', () => {
    const [plan] = blocksOf('yaml');
    expect(parsePlan(plan, 'plan.yaml').corpora.map((corpus) => corpus.name)).toEqual([
      'telemetry',
    ]);
  });

  it('names only commands and options that there are', () => {
    const lines = blocksOf('').flatMap((block) =>
      block.split('\n').filter((line) => line.startsWith('bitassay ')),
    );
    expect(lines.length).toBeGreaterThan(6);
    const program = buildProgram();
    for (const line of lines) {
      const words = line.replace(/ #.*/, '').trim().split(/\s+/).slice(1);
      const command = program.commands.find((c) => c.name() === words[0]);
      expect(command, line).toBeDefined();
      for (const word of words.filter((w) => w.startsWith('-'))) {
        expect(
          command!.options.some((o) => o.long === word || o.short === word),
          `${line}: ${word}`,
        ).toBe(true);
      }
    }
  });
});
