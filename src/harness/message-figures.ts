import { symbolWidth } from '../coders/fixed.ts';
import { bcaMean } from '../statistics/bca.ts';
import type { CorpusShape } from './corpus-data.ts';
import type { CellBits } from './run-cell.ts';
import type { CellRecord } from './run-record.ts';

function quantile(sorted: Float64Array, share: number): number {
  return sorted[Math.min(sorted.length - 1, Math.max(0, Math.ceil(share * sorted.length) - 1))];
}

/** Messages between which the interval of their mean is drawn: fewer say too little, more need none. */
const FEWEST_MESSAGES = 8;
const MOST_MESSAGES = 20_000;

/** Carried bytes of messages: mean, quantiles, most. There is at least one message. */
export function messageBytes(bits: Float64Array): NonNullable<CellRecord['message_bytes']> {
  const bytes = Float64Array.from(bits, (b) => b / 8).sort();
  let sum = 0;
  for (const value of bytes) sum += value;
  const drawn = bytes.length >= FEWEST_MESSAGES && bytes.length <= MOST_MESSAGES;
  const interval = drawn ? bcaMean(bytes, { seed: 1, repetitions: 400 }) : undefined;
  return {
    mean: sum / bytes.length,
    ...(interval === undefined ? {} : { mean_low: interval.low, mean_high: interval.high }),
    p50: quantile(bytes, 0.5),
    p95: quantile(bytes, 0.95),
    p99: quantile(bytes, 0.99),
    max: bytes[bytes.length - 1],
  };
}

/** How a cell's messages compare with the same messages at a fixed width. */
export interface MessageGrowth {
  /** Share of messages that take more bits than their symbols do at ⌈log2 m⌉ bits each, rounded up to `align`. */
  readonly growShare: number;
  /** Of the message of most carried bits; the first of several. From 0, in the part that is coded. */
  readonly largestIndex: number;
  /** The message that grows most, or where none grows shrinks least, in bits; the first of several. */
  readonly worst: {
    readonly index: number;
    readonly bits: number;
    readonly fixedWidthBits: number;
    /** Under fill, its first unit: each candidate cuts messages of its own. */
    readonly firstUnit?: number;
  };
}

/** Which messages grow; undefined where there are none. Indexes only: no content leaves the corpus. */
export function messageGrowth(
  { cell, messageBits, messageEnds }: CellBits,
  { alphabetSize, fill, test }: CorpusShape,
): MessageGrowth | undefined {
  if (messageBits.length === 0) return undefined;
  const width = symbolWidth(alphabetSize);
  let grown = 0;
  let largestIndex = 0;
  let worst = { index: 0, bits: 0, fixedWidthBits: 0 };
  let worstGrowth = Number.NEGATIVE_INFINITY;
  let start = 0;
  for (let index = 0; index < messageBits.length; index++) {
    const bits = messageBits[index];
    const symbolBits = (messageEnds[index] - start) * width;
    const fixedWidthBits = Math.ceil(symbolBits / cell.align) * cell.align;
    start = messageEnds[index];
    if (bits > fixedWidthBits) grown++;
    if (bits > messageBits[largestIndex]) largestIndex = index;
    if (bits - fixedWidthBits > worstGrowth) {
      worstGrowth = bits - fixedWidthBits;
      worst = { index, bits, fixedWidthBits };
    }
  }
  const from = worst.index === 0 ? 0 : messageEnds[worst.index - 1];
  return {
    growShare: grown / messageBits.length,
    largestIndex,
    worst: {
      ...worst,
      ...(fill === undefined ? {} : { firstUnit: unitAt(test.messageEnds, from) }),
    },
  };
}

/** The unit that begins at this symbol. */
function unitAt(unitEnds: Uint32Array, symbol: number): number {
  let unit = 0;
  while (unit < unitEnds.length && unitEnds[unit] <= symbol) unit++;
  return unit;
}

/** What a record says of it, where there is more than one message. */
export function growthRecord(
  growth: MessageGrowth | undefined,
  messageCount: number,
): Pick<CellRecord, 'messages'> {
  if (growth === undefined || messageCount < 2) return {};
  const { growShare, largestIndex, worst } = growth;
  return {
    messages: {
      grow_share: growShare,
      largest_index: largestIndex,
      worst: {
        index: worst.index,
        bytes: worst.bits / 8,
        fixed_width_bytes: worst.fixedWidthBits / 8,
        ...(worst.firstUnit === undefined ? {} : { first_unit: worst.firstUnit }),
      },
    },
  };
}
