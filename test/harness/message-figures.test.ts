import { describe, expect, it } from 'vitest';
import { parseCandidates } from '../../src/coders/candidate.ts';
import { listCells } from '../../src/harness/cells.ts';
import type { CorpusData } from '../../src/harness/corpus-data.ts';
import { growthRecord, messageBytes, messageGrowth } from '../../src/harness/message-figures.ts';
import { runAll } from '../../src/harness/run-all.ts';
import type { CellBits } from '../../src/harness/run-cell.ts';
import { runRecordSchema } from '../../src/harness/run-record.ts';

const cellOf = (align: number) =>
  listCells(['a'], parseCandidates('fixed'), ['sent'], ['message'], { align }).cells[0];

/** Growth of messages of so many bits and symbols. */
function growthOf(
  messages: readonly (readonly [bits: number, symbols: number])[],
  {
    alphabetSize = 256,
    align = 8,
    unitEnds,
  }: {
    alphabetSize?: number;
    align?: number;
    unitEnds?: readonly number[];
  } = {},
) {
  let at = 0;
  const messageEnds = Uint32Array.from(messages, ([, symbols]) => (at += symbols));
  const bits = {
    cell: cellOf(align),
    messageBits: Float64Array.from(messages, ([own]) => own),
    messageEnds,
  } as unknown as CellBits;
  const corpus = {
    alphabetSize,
    test: {
      alphabetSize,
      symbols: new Uint8Array(at),
      messageEnds: Uint32Array.from(unitEnds ?? messageEnds),
    },
    ...(unitEnds === undefined ? {} : { fill: { bytes: 192 } }),
  } as unknown as CorpusData;
  return messageGrowth(bits, corpus);
}

describe('messageGrowth', () => {
  it('finds the share that grow, the largest and the worst', () => {
    // At 8 bits a symbol: 80, 40, 16 and 0 bits.
    expect(
      growthOf([
        [72, 10],
        [40, 5],
        [32, 2],
        [8, 0],
      ]),
    ).toEqual({
      growShare: 0.5,
      largestIndex: 0,
      worst: { index: 2, bits: 32, fixedWidthBits: 16 },
    });
  });

  it('takes the one that shrinks least where none grows, and the first of equals', () => {
    expect(
      growthOf([
        [40, 10],
        [40, 7],
        [24, 5],
        [40, 7],
      ]),
    ).toEqual({
      growShare: 0,
      largestIndex: 0,
      worst: { index: 1, bits: 40, fixedWidthBits: 56 },
    });
  });

  it('rounds the fixed width to whole steps of align, as carried bits are', () => {
    // Ten symbols of 3 take 2 bits each: 20 bits, carried as 24 or as 32.
    const of = (bits: number, align: number) => growthOf([[bits, 10]], { alphabetSize: 3, align })!;
    expect(of(24, 8)).toMatchObject({ growShare: 0, worst: { fixedWidthBits: 24 } });
    expect(of(21, 1)).toMatchObject({ growShare: 1, worst: { fixedWidthBits: 20 } });
    expect(of(32, 32)).toMatchObject({ growShare: 0, worst: { fixedWidthBits: 32 } });
    // One symbol only: no bits at a fixed width, so that whatever is carried is growth.
    expect(growthOf([[8, 10]], { alphabetSize: 1 })).toMatchObject({ growShare: 1 });
    expect(growthOf([])).toBeUndefined();
  });

  it('names the first unit of the worst message where messages are filled', () => {
    const units = { unitEnds: [4, 8, 12, 16, 20] };
    expect(
      growthOf(
        [
          [100, 8],
          [200, 4],
          [80, 8],
        ],
        units,
      )!.worst,
    ).toEqual({
      index: 1,
      bits: 200,
      fixedWidthBits: 32,
      firstUnit: 2,
    });
    expect(
      growthOf(
        [
          [200, 8],
          [10, 12],
        ],
        units,
      )!.worst.firstUnit,
    ).toBe(0);
  });
});

describe('growthRecord', () => {
  it('is for several messages', () => {
    const growth = growthOf([
      [16, 1],
      [24, 9],
    ])!;
    expect(growthRecord(growth, 1)).toEqual({});
    expect(growthRecord(undefined, 0)).toEqual({});
    expect(growthRecord(growth, 2)).toEqual({
      messages: {
        grow_share: 0.5,
        largest_index: 1,
        worst: { index: 0, bytes: 2, fixed_width_bytes: 1 },
      },
    });
  });
});

describe('messageBytes', () => {
  it('takes quantiles that are sizes of messages: the least that so many do not exceed', () => {
    // 1 … 200 bytes: half do not exceed 100, 95 % not 190, 99 % not 198.
    const bits = Float64Array.from({ length: 200 }, (_, i) => 8 * (200 - i));
    expect(messageBytes(bits)).toMatchObject({
      mean: 100.5,
      p50: 100,
      p95: 190,
      p99: 198,
      max: 200,
    });
    expect(messageBytes(Float64Array.of(12))).toEqual({
      mean: 1.5,
      p50: 1.5,
      p95: 1.5,
      p99: 1.5,
      max: 1.5,
    });
  });
});

describe('a run record', () => {
  it('tells which messages a coder serves badly', async () => {
    const messageEnds = Uint32Array.of(3, 3, 13);
    const symbols = new Uint8Array(13).fill(7);
    const { record } = await runAll({
      title: 'messages',
      corpora: [
        {
          name: 'a',
          key: 'a',
          sha256: '',
          symbolsAs: 'bytes',
          messagesAs: 'lines',
          lengths: 'sent',
          alphabetSize: 256,
          sourceBytes: 13,
          test: { alphabetSize: 256, symbols, messageEnds },
          testFiles: [{ path: '', sha256: '', messageEnd: 3 }],
        },
      ],
      candidates: parseCandidates('fixed'),
      policies: ['sent'],
      resets: ['message'],
      align: 8,
      split: 'none',
    });
    expect(runRecordSchema.safeParse(record).success).toBe(true);
    // Every message carries its symbols at full width, and its count: all grow, by one byte each.
    expect(record.cells[0].messages).toEqual({
      grow_share: 1,
      largest_index: 2,
      worst: { index: 0, bytes: 4, fixed_width_bytes: 3 },
    });
  });
});
