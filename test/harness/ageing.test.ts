import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import { ageingOf } from '../../src/harness/ageing.ts';
import { listCells } from '../../src/harness/cells.ts';
import type { CorpusData } from '../../src/harness/corpus-data.ts';
import { runCell } from '../../src/harness/run-cell.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { parseRecordField } from '../../src/symbols/record.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';

const MESSAGES = 800;
const LENGTH = 50;

/** Messages of bits whose share of ones is `shareOf(message)`. */
function source(seed: number, shareOf: (message: number) => number): SymbolSequence {
  const random = new SeededGenerator(seed);
  const symbols = new Uint8Array(MESSAGES * LENGTH);
  for (let i = 0; i < symbols.length; i++) {
    symbols[i] = random.real() < shareOf(Math.floor(i / LENGTH)) ? 1 : 0;
  }
  const messageEnds = Uint32Array.from({ length: MESSAGES }, (_, i) => (i + 1) * LENGTH);
  return { alphabetSize: 2, symbols, messageEnds };
}

function ageing(shareOf: (message: number) => number) {
  const test = source(2, shareOf);
  const corpus: CorpusData = {
    name: 'a',
    key: 'a',
    sha256: '',
    symbolsAs: 'bits',
    messagesAs: 'every=50',
    lengths: 'link',
    alphabetSize: 2,
    sourceBytes: test.symbols.length,
    train: source(1, () => 0.1),
    test,
    testFiles: [{ path: 'a', sha256: '', messageEnd: MESSAGES }],
  };
  const { cells } = listCells(['a'], [parseCandidate('arith:order=0')], ['shipped'], ['message']);
  return ageingOf(cells[0], corpus)!;
}

const entropy = (p: number): number => -p * Math.log2(p) - (1 - p) * Math.log2(1 - p);
const cross = (p: number, q: number): number => -p * Math.log2(q) - (1 - p) * Math.log2(1 - q);

describe('ageing of shipped tables', () => {
  it('does not show on a source that stays as it was, and retraining never pays', () => {
    const { segments, paysAfter } = ageing(() => 0.1);
    expect(segments.map((s) => s.distance)).toEqual([0, 1, 2, 3, 4, 5, 6, 7].map((i) => i * 5000));
    // Five standard errors of the mean code length of a segment of 5000 symbols: √(p q) · log2(q/p) / √5000.
    const error = (5 * Math.sqrt(0.09) * Math.log2(9)) / Math.sqrt(5000);
    for (const { rate } of segments) expect(Math.abs(rate - entropy(0.1))).toBeLessThan(error);
    expect(paysAfter).toBeUndefined();
  });

  it('shows the cross code length after a switch, and says when new tables have paid', () => {
    const { segments, paysAfter, tableBits } = ageing((message) => (message < 400 ? 0.1 : 0.5));
    // Closed form: a code for 0.1 on symbols of share 0.5. One standard error is 0.5 · log2 9 / √5000.
    const error = (5 * 0.5 * Math.log2(9)) / Math.sqrt(5000);
    expect(Math.abs(segments[7].rate - cross(0.5, 0.1))).toBeLessThan(error);
    expect(segments[7].retrainedRate).toBeLessThan(segments[7].rate);
    expect(tableBits).toBeGreaterThan(0);
    // Tables trained before segment 4, which begins at the switch, know nothing of it, though by chance they may err less there;
    // those of segment 5 know it, and save far more than their bits.
    expect([25_000, 30_000]).toContain(paysAfter);
  });
});

describe('ageing of a cell that codes fields', () => {
  /** Records of a counter that steps by 1 or 2, and a byte of noise; eight to a message. */
  function records(seed: number): SymbolSequence {
    const random = new SeededGenerator(seed);
    const symbols = new Uint8Array(3 * 640);
    let counter = 0;
    for (let at = 0; at < symbols.length; at += 3) {
      counter += random.real() < 0.5 ? 1 : 2;
      symbols[at] = counter & 0xff;
      symbols[at + 1] = counter >>> 8;
      symbols[at + 2] = Math.floor(16 * random.real());
    }
    const messageEnds = Uint32Array.from({ length: 80 }, (_, i) => (i + 1) * 24);
    return { alphabetSize: 256, symbols, messageEnds };
  }

  it('codes them as the plan says, as the cell itself does: the old tables give its ideal', async () => {
    const [cell] = listCells(['a'], [parseCandidate('fields')], ['shipped'], ['message'], {
      filled: new Set(),
      records: new Set(['a']),
    }).cells;
    const ideal: number[] = [];
    for (const counter of ['raw', 'delta/last']) {
      const corpus: CorpusData = {
        name: 'a',
        key: 'a',
        sha256: '',
        symbolsAs: 'bytes',
        messagesAs: 'records=8',
        lengths: 'link',
        alphabetSize: 256,
        record: {
          bytes: 3,
          fields: [parseRecordField('counter', 'u16le@0', 3), parseRecordField('noise', 'u8@2', 3)],
        },
        fields: { counter, noise: 'raw' },
        sourceBytes: 1920,
        train: records(1),
        test: records(2),
        testFiles: [{ path: 'a', sha256: '', messageEnd: 80 }],
      };
      const bits = await runCell(cell, corpus, async () => {});
      if ('failure' in bits) throw new Error(bits.failure);
      const { segments } = ageingOf(cell, corpus)!;
      const sum = segments.reduce((total, s) => total + s.rate * s.symbolCount, 0);
      expect(sum).toBeCloseTo(bits.totals.idealBits!, 6);
      ideal.push(sum);
    }
    // The plan's choice reaches ageing: the two ways do not cost the same.
    expect(Math.abs(ideal[0] - ideal[1])).toBeGreaterThan(100);
  });
});
