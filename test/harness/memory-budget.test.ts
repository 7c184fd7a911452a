import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { CorpusSpec } from '../../src/corpus/corpus.ts';
import { countMessages } from '../../src/corpus/count-messages.ts';
import { loadRawCorpus } from '../../src/corpus/intake.ts';
import { fitsMemory, streamingLimits } from '../../src/harness/memory-budget.ts';
import { parseSymbolTaker } from '../../src/symbols/takers/registry.ts';

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-budget-'));
  writeFileSync(join(folder, 'long.bin'), new Uint8Array(3e6));
  writeFileSync(join(folder, 'lines.log'), 'x\n'.repeat(1_200_000));
  writeFileSync(
    join(folder, 'frames.bin'),
    Uint8Array.from([2, 65, 10, 0, 1, 66, 10, ...Array(10)]),
  );
});
afterAll(() => rmSync(folder, { recursive: true }));

const specOf = (file: string, more: Partial<CorpusSpec> = {}): CorpusSpec => ({
  name: 'uplink',
  files: [file],
  symbols: 'bytes',
  messages: 'whole',
  ...more,
});

describe('countMessages', () => {
  test.each([
    ['lines.log', { messages: 'lines' }],
    ['lines.log', { messages: 'every=7' }],
    ['lines.log', { messages: 'every=7', symbols: 'bits' }],
    ['lines.log', { messages: 'records=3', record: { bytes: 8, fields: [] } }],
    ['lines.log', { messages: 'fill=100,unit=24' }],
    ['lines.log', { messages: 'fill=100,unit=line' }],
    ['frames.bin', { messages: 'prefix=u8' }],
    ['frames.bin', {}],
  ])('of %s as %j is what intake finds', async (file, more) => {
    const spec = specOf(file, more);
    const raw = await loadRawCorpus(spec, folder);
    const found = { absolutePath: join(folder, file), path: file };
    const { maxSymbolsPerByte } = parseSymbolTaker(spec.symbols);
    expect(countMessages(found, raw.sourceBytes, maxSymbolsPerByte, spec)).toBe(
      raw.messageEnds.length,
    );
  });
});

describe('fitsMemory', () => {
  test('weighs bytes and messages, each by itself', async () => {
    expect(await fitsMemory(specOf('long.bin'), folder, 256e6)).toBe(true);
    expect(await fitsMemory(specOf('long.bin', { symbols: 'bits' }), folder, 256e6)).toBe(false);
    const lines = specOf('lines.log', { messages: 'lines' });
    expect(await fitsMemory(lines, folder, 256e6)).toBe(false);
    expect(await fitsMemory(lines, folder, 1e9)).toBe(true);
  });

  test('refuses a sample that does not fit, since it is never read in pieces', async () => {
    const sample = { kind: 'every', every: 2, blockBytes: 1e6 } as const;
    const spec = specOf('long.bin', { symbols: 'bits', sample });
    await expect(fitsMemory(spec, folder, 256e6)).rejects.toThrow('a sample is taken as a whole');
    expect(await fitsMemory(specOf('long.bin', { sample }), folder, 256e6)).toBe(true);
  });
});

test('models and messages share what the program leaves', () => {
  const { modelBytes, maxMessages } = streamingLimits(512e6);
  expect(modelBytes + maxMessages).toBeLessThan(512e6);
  expect(streamingLimits(2e9).modelBytes).toBeGreaterThan(modelBytes);
  expect(streamingLimits(2e9).maxMessages).toBeGreaterThan(maxMessages);
});
