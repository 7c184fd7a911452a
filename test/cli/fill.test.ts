/** `try` with messages that are filled, as a user meets it: the built program and real files. */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { runRecordSchema } from '../../src/harness/run-record.ts';
import { integers } from '../conformance/sequences.ts';

const main = fileURLToPath(new URL('../../dist/cli/main.js', import.meta.url));

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-fill-cli-'));
  // 200 records of 6 bytes: four that drift, two of noise.
  const next = integers(5);
  const bytes = new Uint8Array(1200);
  for (let at = 0; at < bytes.length; at += 6) {
    for (let i = 0; i < 4; i++) bytes[at + i] = 40 + i * 20 + Math.floor(at / 150) + (next() % 3);
    bytes[at + 4] = next() & 0xff;
    bytes[at + 5] = next() & 0xff;
  }
  writeFileSync(join(folder, 'records.bin'), bytes);
  const lines = Array.from({ length: 120 }, (_, i) => `${i} door ${i % 7 === 0 ? 'open' : 'shut'}`);
  writeFileSync(join(folder, 'events.log'), lines.join('\n'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function bitassay(...args: string[]): { code: number | null; out: string; err: string } {
  const { status, stdout, stderr } = spawnSync(process.execPath, [main, ...args], {
    cwd: folder,
    encoding: 'utf8',
    maxBuffer: 1 << 26,
  });
  return { code: status, out: stdout, err: stderr };
}

describe('bitassay try --messages fill=…', () => {
  it('says how many units each candidate puts into a message', () => {
    const { code, out } = bitassay('try', 'records.bin', '--messages', 'fill=40,unit=6');
    expect(code).toBe(0);
    expect(out).toMatch(/units\//);
    // 6 units of 48 bits and a count of 5 bits are 293 of 320 bits: 17 messages of 100 units.
    expect(out).toMatch(/^ {2}fixed +– .* 5\.9 +17 /m);
    expect(out.replace(/\s+/g, ' ')).toContain('A flipped bit can spoil a whole message');
    expect(out).toContain('by unit');
    for (const line of out.split('\n')) expect([...line].length).toBeLessThanOrEqual(100);
  });

  it('fills with lines, shipped tables from the first half', () => {
    const args = [
      'try',
      'events.log',
      '--messages',
      'fill=60,unit=line',
      '--coder',
      'arith:order=2',
    ];
    const { code, out } = bitassay(...args, '--json');
    expect(code).toBe(0);
    const record = runRecordSchema.parse(JSON.parse(out));
    expect(record.cells.map((c) => c.id)).toEqual([
      'events.log/arith:order=2@shipped/message',
      'events.log/arith:order=2@learned/message',
    ]);
    for (const cell of record.cells) {
      expect(cell.verified).toBe(true);
      expect(cell.unit_count).toBe(60);
      expect(cell.message_bytes!.max).toBeLessThanOrEqual(60);
    }
    expect(record.corpora[0]).toMatchObject({ lengths: 'link', unit_count: 60, fill_bytes: 60 });
  });

  it('refuses a ragged file, and names the unit that never fits', () => {
    const ragged = bitassay('try', 'records.bin', '--messages', 'fill=40,unit=7');
    expect(ragged.code).toBe(2);
    expect(ragged.err).toContain('records.bin is not a whole number of units');
    const small = ['try', 'records.bin', '--messages', 'fill=5,unit=6', '--coder', 'fixed'];
    const { code, out } = bitassay(...small);
    expect(code).toBe(3);
    expect(out.replace(/\s+/g, ' ')).toContain('unit 0 does not fit into a message even alone');
  });

  it('is proposed after a whole file whose records are known', () => {
    const { out } = bitassay('try', 'records.bin', '--record', '6', '--coder', 'fixed');
    expect(out).toContain('Next: bitassay try records.bin --messages fill=192,unit=6');
  });
});
