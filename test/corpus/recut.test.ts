import { mkdtemp, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { CorpusSpec } from '../../src/corpus/corpus.ts';
import { loadRawCorpus } from '../../src/corpus/intake.ts';
import { messagesOfSymbols, recutRaw, symbolsPerMessage } from '../../src/corpus/recut.ts';
import { InputError } from '../../src/errors/errors.ts';

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'recut-'));
  await writeFile(
    join(folder, 'a.bin'),
    Uint8Array.from({ length: 36 }, (_, i) => i),
  );
  await writeFile(
    join(folder, 'b.bin'),
    Uint8Array.from({ length: 12 }, (_, i) => 100 + i),
  );
});
afterAll(() => rm(folder, { recursive: true }));

const record = {
  bytes: 12,
  fields: [{ name: 'v', type: 'u16le' as const, offsetBytes: 2, widthBytes: 2 }],
};
const spec = (more: Partial<CorpusSpec>): CorpusSpec => ({
  name: 'telemetry',
  files: ['a.bin', 'b.bin'],
  symbols: 'bytes',
  messages: 'whole',
  ...more,
});

describe('messages of so many symbols', () => {
  test.each([
    [{ messages: 'whole' }, 5, 'every=5'],
    [{ messages: 'every=7' }, 5, 'every=5'],
    [{ messages: 'every=7', symbols: 'u16le' }, 5, 'every=5'],
    [{ messages: 'records=1', record }, 24, 'records=2'],
    // A record of 12 bytes holds 24 nibbles, 6 pairs of bytes, and one value of each field.
    [{ messages: 'records=2', record, symbols: 'nibbles' }, 24, 'records=1'],
    [{ messages: 'records=1', record, symbols: 'u16le' }, 18, 'records=3'],
    [{ messages: 'records=1', record, symbols: 'field:v' }, 2, 'records=2'],
  ])('%j by %i are %s, as if the plan had said so', async (more, count, messages) => {
    const own = spec(more as Partial<CorpusSpec>);
    expect(messagesOfSymbols(own, count)).toBe(messages);
    const raw = await loadRawCorpus(own, folder);
    const recut = recutRaw(raw, own, count);
    expect(recut).toEqual(await loadRawCorpus({ ...own, messages }, folder));
    // Values are not copied.
    expect(recut.values).toBe(raw.values);
  });

  test('keep the lengths that the plan says', async () => {
    const own = spec({ lengths: 'known' });
    expect(recutRaw(await loadRawCorpus(own, folder), own, 4).lengths).toBe('known');
  });

  test.each([
    [{ messages: 'lines' }, 5, 'messages: whole, every=N or records=K'],
    [{ messages: 'prefix=u8' }, 5, 'messages: whole, every=N or records=K'],
    [{ messages: 'fill=64,unit=12' }, 5, 'messages: whole, every=N or records=K'],
    [{ messages: 'records=1', record }, 18, 'a multiple of 12, the symbols of one record'],
    [
      { messages: 'records=1', record, symbols: 'codepoints' },
      12,
      'symbols of which each record holds a fixed number, not codepoints',
    ],
  ])('of %j by %i are refused', (more, count, expected) => {
    try {
      messagesOfSymbols(spec(more as Partial<CorpusSpec>), count);
      expect.unreachable();
    } catch (error) {
      expect(error).toBeInstanceOf(InputError);
      expect((error as InputError).where).toMatchObject({ key: 'message_symbols', expected });
      expect((error as InputError).message).toContain('telemetry');
    }
  });

  test('are known of a framing that fixes them', () => {
    expect(symbolsPerMessage(spec({ messages: 'every=7' }))).toBe(7);
    expect(symbolsPerMessage(spec({ messages: 'records=3', record }))).toBe(36);
    expect(symbolsPerMessage(spec({ messages: 'whole' }))).toBeUndefined();
    expect(symbolsPerMessage(spec({ messages: 'lines' }))).toBeUndefined();
  });
});
