/** `bitassay calibrate` as a user meets it: the built program, exit codes and what is said. */
import { spawnSync } from 'node:child_process';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { calibrationRecordSchema } from '../../src/harness/calibrate-record.ts';

const main = fileURLToPath(new URL('../../dist/cli/main.js', import.meta.url));

function calibrate(...args: string[]): { code: number | null; out: string; err: string } {
  const { status, stdout, stderr } = spawnSync(process.execPath, [main, 'calibrate', ...args], {
    encoding: 'utf8',
    maxBuffer: 1 << 26,
  });
  return { code: status, out: stdout, err: stderr };
}

describe('bitassay calibrate', () => {
  it('prints a record in JSON, and the same one again', () => {
    const options = ['--rough', '--source', 'rare-bit', '--sizes', '2000,500', '--json'];
    const { code, out, err } = calibrate(...options);
    expect(err).toBe('');
    expect(code).toBe(0);
    const record = calibrationRecordSchema.parse(JSON.parse(out));
    expect(record.intervals.map((line) => line.symbol_count)).toEqual([
      500, 500, 500, 2000, 2000, 2000,
    ]);
    expect(calibrate(...options).out).toBe(out);
  });

  it('prints a screen with its seed, its verdicts and what to do next', () => {
    const { code, out } = calibrate('--rough', '--source', 'chain-1', '--sizes', '1000');
    expect(code).toBe(0);
    expect(out).toContain('"bitassay calibrate, stretches, 1"');
    expect(out).toMatch(/chain-1 +1 000 +1 +0\.5721 .* holds/);
    expect(out).toContain('no promise is broken');
    expect(out).toContain('Next: bitassay entropy FILE');
  });

  it('names the nearest source, and what a length may be', () => {
    const source = calibrate('--source', 'chian-1');
    expect(source.code).toBe(2);
    expect(source.err).toContain('Did you mean chain-1?');
    for (const sizes of ['99', '10000001', '1e3x', '1000,,2000', '1000.5']) {
      const { code, err, out } = calibrate('--sizes', sizes);
      expect(code).toBe(2);
      expect(out).toBe('');
      expect(err).toContain('whole numbers from 100 to 10000000');
    }
  });
});
