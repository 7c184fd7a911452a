/** `bitassay adopt`, `gate` and `history` on runs as they lie in their folders. */
import { existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { baselineBeside } from '../../src/cli/commands/adopt.ts';
import { CommandEnd } from '../../src/cli/exit.ts';
import { buildProgram } from '../../src/cli/program.ts';
import { InputError } from '../../src/errors/errors.ts';
import type { RunRecord } from '../../src/harness/run-record.ts';
import { cellOf, recordOf } from '../gate/made-up.ts';

let folder = '';
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-gate-'));
  vi.stubEnv('BITASSAY_CACHE', join(folder, 'cache'));
});
afterEach(() => {
  vi.unstubAllEnvs();
  rmSync(folder, { recursive: true, force: true });
});

const at = (name: string): string => join(folder, name);

/** Leaves a run of one cell of so many bytes. */
function leave(name: string, bytes: number, more: Partial<RunRecord> = {}): string {
  mkdirSync(at(name));
  const record = recordOf([cellOf('uplink/huffman@sent/message', bytes)], more);
  writeFileSync(at(`${name}/run.json`), JSON.stringify(record));
  return at(name);
}

/** What a command writes to both outputs, and how it ends. */
async function say(...args: string[]): Promise<{ text: string; notes: string; code: number }> {
  const written = { stdout: '', stderr: '' };
  const real = { stdout: process.stdout.write, stderr: process.stderr.write };
  for (const stream of ['stdout', 'stderr'] as const) {
    process[stream].write = ((text: string, done?: unknown) => {
      written[stream] += text;
      if (typeof done === 'function') done();
      return true;
    }) as typeof process.stdout.write;
  }
  let code = 0;
  try {
    await buildProgram().parseAsync(['node', 'bitassay', ...args]);
  } catch (error) {
    if (!(error instanceof CommandEnd)) throw error;
    code = error.code;
  } finally {
    Object.assign(process.stdout, { write: real.stdout });
    Object.assign(process.stderr, { write: real.stderr });
  }
  return { text: written.stdout, notes: written.stderr, code };
}

const lines = (name: string): string[] => readFileSync(at(name), 'utf8').trimEnd().split('\n');

describe('adopt', () => {
  it.each([
    ['plan.run', 'bitassay.baseline.json'],
    ['a/plan.run/', 'a/bitassay.baseline.json'],
    ['a/plan.run/run.json', 'a/bitassay.baseline.json'],
    ['../plan.run', '../bitassay.baseline.json'],
    ['.', join(dirname(process.cwd()), 'bitassay.baseline.json')],
  ])('looks for the baseline of %s in %s', (run, file) => {
    expect(baselineBeside(run)).toBe(join(file));
  });

  it('writes the baseline beside the run’s folder, and adds a line to the history', async () => {
    const run = leave('plan.run', 1000);
    const { text, code } = await say('adopt', run);
    expect(code).toBe(0);
    expect(text).toContain('Adopted: 1 cell');
    expect(readFileSync(at('bitassay.baseline.json'), 'utf8')).toContain('"carried_bits": 8000');
    const [line] = lines('bitassay.history.jsonl');
    await say('adopt', at('plan.run/run.json'));
    expect(lines('bitassay.history.jsonl')).toHaveLength(2);
    expect(lines('bitassay.history.jsonl')[0]).toBe(line);
  });

  it('refuses creep beyond what is allowed, step by step, unless a reason is given, and keeps it', async () => {
    const plan = (record: RunRecord) => ({ ...record.plan, gate: { allow: { total: '1%' } } });
    const made = (name: string, bytes: number) => leave(name, bytes, { plan: plan(recordOf([])) });
    const runs = [made('1.run', 1000), made('2.run', 1006), made('3.run', 1012)];
    expect((await say('adopt', runs[0])).code).toBe(0);
    const second = await say('adopt', runs[1]);
    expect(second.code).toBe(0);
    expect(second.text).toContain('+48 bits over 1 cell, 0 beyond');
    // 1012 is within 1 % of 1006, and not of 1000.
    const kept = readFileSync(at('bitassay.baseline.json'), 'utf8');
    const third = await say('adopt', runs[2]);
    expect(third.code).toBe(1);
    expect(third.text).toContain('+96 bits over 1 cell, 1 beyond');
    expect(third.notes).toContain('--reason');
    expect(readFileSync(at('bitassay.baseline.json'), 'utf8')).toBe(kept);
    expect(lines('bitassay.history.jsonl')).toHaveLength(2);
    expect((await say('gate', runs[2], '--allow', '1%')).code).toBe(0);
    const worth = 'a check of 4 bytes';
    expect((await say('adopt', runs[2], '--reason', worth)).code).toBe(0);
    expect(JSON.parse(lines('bitassay.history.jsonl')[2])).toMatchObject({ reason: worth });
    const told = JSON.parse(
      (await say('history', '--baseline', at('bitassay.baseline.json'), '--json')).text,
    );
    expect(told.steps).toMatchObject([{ run: 3, kind: 'creep', was: 8000, now: 8096 }]);
  });

  it('replaces no baseline of other cells by mistake', async () => {
    await say('adopt', leave('plan.run', 1000));
    mkdirSync(at('other.run'));
    const other = recordOf([cellOf('events/fixed@none/message', 10)]);
    writeFileSync(at('other.run/run.json'), JSON.stringify(other));
    const refused = await say('adopt', at('other.run'));
    expect([refused.code, refused.notes]).toEqual([
      1,
      expect.stringContaining('none of its cells'),
    ]);
    expect((await say('adopt', at('other.run'), '-o', at('other.baseline.json'))).code).toBe(0);
    expect(existsSync(at('other.history.jsonl'))).toBe(true);
  });

  it('takes no run that was interrupted, and no empty reason', async () => {
    const run = leave('plan.run', 1000, { partial: true });
    await expect(say('adopt', run)).rejects.toThrow(/interrupted/);
    await expect(say('adopt', leave('b.run', 1), '--reason', ' ')).rejects.toThrow(InputError);
    expect(existsSync(at('bitassay.baseline.json'))).toBe(false);
  });
});

describe('gate', () => {
  it('ends with 0 for what holds or is better, with 1 for a bit more', async () => {
    await say('adopt', leave('a.run', 1000));
    expect((await say('gate', at('a.run'))).code).toBe(0);
    expect(await say('gate', leave('b.run', 999))).toMatchObject({
      code: 0,
      text: expect.stringContaining('adopt it?'),
    });
    expect(await say('gate', leave('c.run', 1001))).toMatchObject({
      code: 1,
      text: expect.stringContaining('carried bits: 8 008, was 8 000'),
    });
    expect((await say('gate', at('c.run'), '--allow', '8')).code).toBe(0);
    expect((await say('gate', at('c.run'), '--allow', 'total=8')).code).toBe(1);
  });

  it('writes each format to a file, which is replaced', async () => {
    await say('adopt', leave('a.run', 1000));
    const worse = leave('b.run', 1001);
    for (const [format, start] of [
      ['text', ' lost: 1 of 1 cell'],
      ['md', '### bitassay gate: lost'],
      ['junit', '<?xml version="1.0"'],
      ['json', '{\n "gate": 1,\n "verdict": "lost"'],
    ]) {
      const { code, text } = await say('gate', worse, '--to', format, '-o', at('out'));
      expect([code, text]).toEqual([1, '']);
      expect(readFileSync(at('out'), 'utf8').startsWith(start), format).toBe(true);
    }
    await expect(say('gate', worse, '--json', '--to', 'md')).rejects.toThrow(/contradict/);
  });

  it('lists what is not paired, and refuses it only with --complete', async () => {
    const cells = [
      cellOf('uplink/huffman@sent/message', 1000),
      cellOf('uplink/rice@none/message', 9),
    ];
    mkdirSync(at('two.run'));
    writeFileSync(at('two.run/run.json'), JSON.stringify(recordOf(cells)));
    await say('adopt', at('two.run'));
    const one = leave('one.run', 1000);
    expect(await say('gate', one)).toMatchObject({
      code: 0,
      text: expect.stringContaining('uplink/rice@none/message: not in this run'),
    });
    await expect(say('gate', one, '--complete')).rejects.toThrow(/not all/);
    expect((await say('gate', at('two.run'), '--complete')).code).toBe(0);
  });

  it('says yes to nothing: no baseline, no pair, half a run', async () => {
    const run = leave('a.run', 1000);
    await expect(say('gate', run)).rejects.toThrow(/no baseline yet/);
    await say('adopt', run);
    mkdirSync(at('other.run'));
    const other = recordOf([cellOf('events/fixed@none/message', 10)]);
    writeFileSync(at('other.run/run.json'), JSON.stringify(other));
    await expect(say('gate', at('other.run'))).rejects.toThrow(/no cell of this run/);
    await expect(say('gate', leave('half.run', 1000, { partial: true }))).rejects.toThrow(
      /interrupted/,
    );
    await expect(say('gate', at('plan.yaml'), '--baseline', at('none.json'))).rejects.toThrow(
      /no baseline yet/,
    );
  });

  it('runs a plan first, with what it allows', async () => {
    const report = Array.from({ length: 60 }, (_, i) => `unit ${i % 7} supply ${-18 + (i % 5)}\n`);
    writeFileSync(at('reefer.log'), report.join(''));
    const plan = [
      'plan: 1',
      'corpora:',
      '  log: {files: reefer.log, symbols: bytes, messages: lines}',
      'candidates: [huffman]',
      'tables: [sent]',
      'reset: [file]',
      'timing: {repeats: 0}',
      'gate: {allow: {total: 0, each_file: 0.5%}}',
      '',
    ];
    writeFileSync(at('plan.yaml'), plan.join('\n'));
    await say('run', at('plan.yaml'));
    expect((await say('adopt', at('plan.run'))).code).toBe(0);
    const held = await say('gate', at('plan.yaml'), '--complete');
    expect(held.code).toBe(0);
    expect(held.text).toContain('allowed: nothing in all, 0.5 % of each file');
    // One more line in the file: other data, which cannot be held against the old.
    writeFileSync(at('reefer.log'), `${report.join('')}unit 9 supply -17\n`);
    await expect(say('gate', at('plan.yaml'))).rejects.toThrow(/no cell of this run/);
  });
});

describe('history', () => {
  it('shows adopted runs, of a cell that is named', async () => {
    await say('adopt', leave('a.run', 1000));
    await say('adopt', leave('b.run', 1001), '--reason', 'a check');
    const baseline = at('bitassay.baseline.json');
    const { text } = await say('history', '--baseline', baseline, '--cell', 'huffman');
    expect(text).toContain('uplink/huffman@sent/message');
    expect(text).toContain('reason: a check');
    expect((await say('history', '--baseline', baseline, '--allow', '8')).text).toContain(
      'No cell ever',
    );
    await expect(say('history', '--baseline', baseline, '--cell', 'nothing')).rejects.toThrow(
      /no cell/,
    );
    await expect(say('history', '--baseline', at('none.json'))).rejects.toThrow(
      /no run was adopted/,
    );
  });

  it('names the line of the file that is broken', async () => {
    writeFileSync(at('bitassay.history.jsonl'), '\n{}\n');
    await expect(say('history', '--baseline', at('bitassay.baseline.json'))).rejects.toMatchObject({
      where: { line: 2 },
    });
  });
});
