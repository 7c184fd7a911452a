import { describe, expect, test } from 'vitest';
import type { CorpusRecord } from '../../src/harness/run-record.ts';
import { readingLines } from '../../src/report/reading-lines.ts';

const whole: CorpusRecord = {
  name: 'tracker',
  sha256: '00',
  symbols_as: 'bytes',
  messages_as: 'lines',
  lengths: 'sent',
  alphabet_size: 256,
  source_bytes: 1000,
  symbol_count: 1000,
  message_count: 10,
  train_symbol_count: 0,
};

describe('readingLines', () => {
  test('has nothing to say of a corpus that was taken as a whole', () => {
    expect(readingLines(whole, {}, 100)).toEqual([]);
  });

  test('says what blocks there were, and the share of the bytes', () => {
    const sample = {
      blocks: 14,
      of_blocks: 160,
      block_bytes: 1e6,
      bytes: 13_900_000,
      of_bytes: 159_500_000,
    };
    const lines = readingLines({ ...whole, sample }, {}, 60);
    // 13.9 of 159.5 is 8.71 %, to two digits.
    expect(lines.join('').replace(/\s+/g, ' ')).toContain(
      'A sample: 14 of 160 blocks, 8.7 % of the bytes.',
    );
    for (const line of lines) expect(line.length).toBeLessThan(60);
  });

  test('tells a run, with its memory, from entropies alone', () => {
    const pieces: CorpusRecord = { ...whole, in_pieces: true };
    const run = readingLines(pieces, { memory_bytes: 512e6 }, 2000).join();
    expect(run).toContain('to stay within 512MB');
    expect(run).toContain('no speed measured');
    const counted = readingLines(pieces, undefined, 2000).join();
    expect(counted).toContain('orders above 2 were not counted');
    expect(counted).not.toContain('speed');
  });
});
