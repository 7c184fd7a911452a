import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Reset, TablePolicy } from '../../src/coders/contract.ts';
import { listCells } from '../../src/harness/cells.ts';
import type { CorpusData } from '../../src/harness/corpus-data.ts';
import { lossFigures } from '../../src/harness/loss.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';

function corpusOf(messageCount: number): CorpusData {
  const messageEnds = Uint32Array.from({ length: messageCount }, (_, i) => i + 1);
  return {
    name: 'a',
    key: 'a',
    sha256: '',
    symbolsAs: 'bytes',
    messagesAs: 'every=1',
    lengths: 'link',
    alphabetSize: 256,
    sourceBytes: messageCount,
    test: { alphabetSize: 256, symbols: new Uint8Array(messageCount), messageEnds },
    testFiles: [{ path: 'a', sha256: '', messageEnd: messageCount }],
  };
}

const cellOf = (policy: TablePolicy, reset: Reset) =>
  listCells(['a'], [parseCandidate('arith:order=0')], [policy], [reset]).cells[0];

describe('loss', () => {
  it('spoils only the lost message where messages decode alone', () => {
    for (const cell of [cellOf('shipped', 'message'), cellOf('learned', 'message')]) {
      const { share, perLostMessage } = lossFigures(cell, corpusOf(1000), 0.01);
      expect(share).toBeCloseTo(0.01, 12);
      expect(perLostMessage).toBeCloseTo(1, 10);
    }
  });

  it('tends to (R + 1) / 2 messages for each lost one as losses become rare', () => {
    for (const size of [1, 4, 25]) {
      const { perLostMessage } = lossFigures(
        cellOf('learned', `message*${size}`),
        corpusOf(1000),
        1e-7,
      );
      expect(perLostMessage).toBeCloseTo((size + 1) / 2, 4);
    }
  });

  it('speaks of units besides where a message holds several: its mean of them for each message', () => {
    const corpus = corpusOf(1000);
    // Alone: one message, 7.5 units. In groups of 4, rare losses: 5/2 messages.
    expect(lossFigures(cellOf('shipped', 'message'), corpus, 0.01, 7.5).unitsPerLostMessage).toBe(
      7.5,
    );
    const grouped = lossFigures(cellOf('learned', 'message*4'), corpus, 1e-7, 8);
    expect(grouped.unitsPerLostMessage).toBeCloseTo(20, 4);
    expect(lossFigures(cellOf('shipped', 'message'), corpus, 0.01)).not.toHaveProperty(
      'unitsPerLostMessage',
    );
  });

  it('is what a simulation finds', () => {
    const messages = 200;
    const rate = 0.05;
    const size = 7;
    const cell = cellOf('learned', `message*${size}`);
    const expected = lossFigures(cell, corpusOf(messages), rate).share;
    const random = new SeededGenerator(11);
    const rounds = 4000;
    let spoilt = 0;
    for (let round = 0; round < rounds; round++) {
      let broken = false;
      for (let i = 0; i < messages; i++) {
        if (i % size === 0) broken = false;
        if (random.real() < rate) broken = true;
        if (broken) spoilt++;
      }
    }
    // Standard error: below 0.5 · √(size / (messages · rounds)), since messages of one group go together.
    const error = 0.5 * Math.sqrt(size / (messages * rounds));
    expect(Math.abs(spoilt / (messages * rounds) - expected)).toBeLessThan(5 * error);
  });
});
