/** `bitassay choose` on a run as it lies in its folder. */
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { CommandEnd } from '../../src/cli/exit.ts';
import { buildProgram } from '../../src/cli/program.ts';
import { choiceSchema } from '../../src/compare/choice.ts';
import { parsePlan } from '../../src/corpus/plan.ts';
import { requestOf } from '../../src/harness/plan-request.ts';
import { runAll } from '../../src/harness/run-all.ts';
import { writeRunFolder } from '../../src/harness/run-folder.ts';

let folder = '';

const planOf = (limits: string) => `plan: 1
corpora:
  lines: {files: reefer.log, symbols: bytes, messages: lines, weight: 3}
  chunks: {files: reefer.log, symbols: bytes, messages: every=20, weight: 1}
split: {by: message, order: in_time, train: 0.5}
candidates: [fixed, huffman, "arith:order=1,range=32"]
tables: [shipped]
product: {device: decoder}
limits: ${limits}
cost: {price_per_megabyte: 2, currency: EUR, units_per_day: 100, devices: 10}
`;

async function runWith(name: string, limits: string): Promise<string> {
  const { timing: _, ...request } = await requestOf(
    parsePlan(planOf(limits), join(folder, 'plan.yaml')),
  );
  const run = join(folder, name);
  await writeRunFolder(run, await runAll(request));
  return run;
}

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-choose-'));
  const lines = Array.from(
    { length: 300 },
    (_, i) => `unit ${i % 9} supply ${-18 + ((i * 7) % 5)}\n`,
  );
  writeFileSync(join(folder, 'reefer.log'), lines.join(''));
});

afterAll(() => rmSync(folder, { recursive: true, force: true }));

/** What the command writes to standard output, and how it ends. */
async function choose(...args: string[]): Promise<{ text: string; code: number }> {
  const written: string[] = [];
  const real = process.stdout.write;
  process.stdout.write = ((text: string, done?: unknown) => {
    written.push(text);
    if (typeof done === 'function') done();
    return true;
  }) as typeof process.stdout.write;
  try {
    await buildProgram().parseAsync(['node', 'bitassay', 'choose', ...args]);
    return { text: written.join(''), code: 0 };
  } catch (error) {
    if (!(error instanceof CommandEnd)) throw error;
    return { text: written.join(''), code: error.code };
  } finally {
    process.stdout.write = real;
  }
}

describe('bitassay choose', () => {
  it('says what to ship, leaves the same in choice.json, and ends with 0', async () => {
    const run = await runWith(
      'easy.run',
      '{max: {message_bytes_p99: 20}, exports: c, reset: message}',
    );
    const { text, code } = await choose(run);
    expect(code).toBe(0);
    expect(text).toContain('lines: ship arith:order=1,range=32, shipped (least cost of a year)');
    expect(text).toContain('All 3 limits are met');
    expect(text).toContain('Weights: lines 75 %, chunks 25 %.');
    expect(text).toMatch(
      /Next: bitassay export .*easy\.run --cell lines\/arith:order=1,range=32@shipped/,
    );
    expect(text).toContain('certifies nothing');
    for (const line of text.split('\n').filter((l) => !l.startsWith(' Next: ')))
      expect([...line].length, line).toBeLessThanOrEqual(100);
    const file = choiceSchema.parse(JSON.parse(readFileSync(join(run, 'choice.json'), 'utf8')));
    expect(file.corpora.map(({ pick }) => pick)).toEqual([
      'lines/arith:order=1,range=32@shipped/message',
      'chunks/arith:order=1,range=32@shipped/message',
    ]);
    expect(JSON.parse((await choose(run, '--json')).text)).toEqual(file);
  });

  it('ends with 1 where nothing meets the limits, and names what would have to give', async () => {
    const run = await runWith('hard.run', '{max: {message_bytes_max: 2}}');
    const { text, code } = await choose(run);
    expect(code).toBe(1);
    expect(text).toContain('lines: nothing meets the limits');
    expect(text).toMatch(/would have to give bytes of a message, largest from 2 to \d+/);
    expect(existsSync(join(run, 'choice.json'))).toBe(true);
  });

  it('puts two cells side by side', async () => {
    const run = await runWith('why.run', '{}');
    const { text, code } = await choose(run, '--why', 'lines/huffman', 'lines/arith');
    expect(code).toBe(0);
    expect(text).toMatch(
      /huffman, shipped needs \d\.\d+ bits per byte more than arith:order=1,range=32, shipped \(\d/,
    );
    expect(text).toMatch(/^ rate +\d\.\d{3} +\d\.\d{3} +−\d\.\d{3}$/m);
    await expect(choose(run, '--why', 'lines/huffman')).rejects.toThrow(/takes two cells/);
    await expect(choose(run, '--why', 'lines/huffman', 'chunks/huffman')).rejects.toThrow(
      /two corpora/,
    );
    await expect(choose(run, '--why', 'lines/huffman', 'nowhere')).rejects.toThrow(
      /names no cells/,
    );
  });

  it('takes figures measured on the target', async () => {
    const run = await runWith('device.run', '{max: {flash_bytes: 5000, cycles_per_symbol: 200}}');
    const before = await choose(run);
    expect(before.code).toBe(1);
    const csv = join(folder, 'device.csv');
    writeFileSync(
      csv,
      'cell,flash_bytes,cycles_per_symbol\nlines/huffman,900,60\nlines/arith,4000,190\nchunks/huffman,900,60\n',
    );
    const { text, code } = await choose(run, '--measured', csv);
    expect(code).toBe(0);
    expect(text).toContain('lines: ship arith:order=1,range=32');
    expect(text).toContain('chunks: ship huffman');
  });

  it('refuses what is no run', async () => {
    await expect(choose(join(folder, 'nothing.run'))).rejects.toThrow(/run\.json|no such file/i);
  });
});
