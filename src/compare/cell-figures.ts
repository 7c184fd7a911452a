import type { MessagePairs } from '../harness/run-all.ts';
import type { CellRecord } from '../harness/run-record.ts';
import { pairedDifference } from '../statistics/paired-difference.ts';
import { blockSums, blocksFor, LEAST_BLOCKS } from './comparison-blocks.ts';
import { comparedBits } from './contenders.ts';

/** Figures that a limit may be set on, by the key that a plan gives it. */
export const LARGEST_KEYS = [
  'rate',
  'flash_bytes',
  'ram_bytes',
  'code_bytes',
  'cycles_per_symbol',
  'message_bytes_mean',
  'message_bytes_p50',
  'message_bytes_p95',
  'message_bytes_p99',
  'message_bytes_max',
] as const;
export const LEAST_KEYS = ['encode_speed', 'decode_speed', 'units_per_message'] as const;

export type FigureKey = (typeof LARGEST_KEYS)[number] | (typeof LEAST_KEYS)[number];

/** A figure of a cell; `low` and `high` where data or timing leave it open, absent where it is exact or declared. */
export interface Figure {
  readonly value: number;
  readonly low?: number;
  readonly high?: number;
}

/** The end of the product that declared sizes are taken of; `both`: the larger. */
export type DeviceEnd = 'encoder' | 'decoder' | 'both';

/** Figures of a cell, each computed when asked for. */
export class CellFigures {
  readonly cell: CellRecord;
  readonly #pairs: MessagePairs | undefined;
  readonly #end: DeviceEnd;
  readonly #sampled: boolean;
  readonly #known = new Map<FigureKey, Figure | undefined>();

  /** @param pairs  carried bits and symbols of each message, or unit; without them nothing has an interval but speed */
  constructor(cell: CellRecord, pairs: MessagePairs | undefined, end: DeviceEnd, sampled = false) {
    this.cell = cell;
    this.#sampled = sampled;
    this.#pairs = pairs;
    this.#end = end;
  }

  /** Undefined where the cell has no such figure. */
  of(key: FigureKey): Figure | undefined {
    if (!this.#known.has(key)) this.#known.set(key, this.#figure(key));
    return this.#known.get(key);
  }

  /**
   * Steps of so many bytes that a link bills for one unit, or message, were it to bill in these.
   * @returns undefined where message lengths are not known: messages that are filled, and longer than a step
   */
  stepsPerUnit(stepBytes: number): number | undefined {
    const { unit_count: units, message_count: messages, message_bytes: bytes } = this.cell;
    if (messages === undefined || bytes === undefined || messages === 0) return undefined;
    if (units !== undefined) return bytes.max <= stepBytes ? messages / units : undefined;
    if (this.#pairs === undefined) return undefined;
    let steps = 0;
    for (const bits of this.#pairs.bits) steps += Math.ceil(bits / 8 / stepBytes);
    return steps / messages;
  }

  #figure(key: FigureKey): Figure | undefined {
    switch (key) {
      case 'rate':
        return this.#rateFigure();
      case 'units_per_message':
        return this.#unitsPerMessage();
      case 'encode_speed':
        return speedOf(this.cell.encode);
      case 'decode_speed':
        return speedOf(this.cell.decode);
      case 'flash_bytes':
      case 'ram_bytes':
      case 'code_bytes':
      case 'cycles_per_symbol':
        return this.#size(key);
      case 'message_bytes_mean':
        return this.#meanBytes();
      default:
        return this.#quantile(key);
    }
  }

  #size(key: 'flash_bytes' | 'ram_bytes' | 'code_bytes' | 'cycles_per_symbol'): Figure | undefined {
    const { encoder, decoder } = this.cell;
    const sizes = [
      ...(this.#end === 'decoder' ? [] : [encoder?.[key]]),
      ...(this.#end === 'encoder' ? [] : [decoder?.[key]]),
    ];
    if (sizes.some((size) => size === undefined)) return undefined;
    return { value: Math.max(...(sizes as number[])) };
  }

  /** The rate, its interval over the blocks in which cells are compared. */
  #rateFigure(): Figure | undefined {
    if (this.cell.rate === undefined) return undefined;
    return this.#pairs === undefined ? { value: this.cell.rate } : this.#rateOver(this.#pairs);
  }

  #rateOver(pairs: MessagePairs): Figure {
    const value = this.cell.rate!;
    const filled = this.cell.unit_count === undefined ? undefined : this.cell.message_count;
    // Of a sample each block stands as a file, and nothing smaller may be resampled.
    const sampleBlocks = this.#sampled
      ? (this.cell.files ?? []).filter((file) => file.symbol_count > 0).length
      : undefined;
    const blocks = blocksFor(pairs.bits.length, filled, sampleBlocks);
    if (blocks.count < LEAST_BLOCKS) return { value };
    const bits = blockSums(comparedBits(this.cell, pairs), blocks);
    const { low, high } = pairedDifference({
      bitsA: new Float64Array(bits.length),
      bitsB: bits,
      symbols: blockSums(pairs.symbols, blocks),
      seed: 1,
      repetitions: 1000,
      level: 0.95,
    });
    return { value, low, high };
  }

  /** As the rate varies, so do the units that a budget holds, the other way round. */
  #unitsPerMessage(): Figure | undefined {
    const value = this.cell.units_per_message?.mean;
    if (value === undefined) return undefined;
    return scaled(value, this.of('rate'), (rate, bound) => rate / bound);
  }

  #meanBytes(): Figure | undefined {
    const value = this.cell.message_bytes?.mean;
    if (value === undefined) return undefined;
    // Where messages are filled, their length hardly varies with the data.
    if (this.cell.unit_count !== undefined) return { value };
    return scaled(value, this.of('rate'), (rate, bound) => bound / rate);
  }

  /** A quantile of message lengths, with the order statistics between which it lies; none for the largest message. */
  #quantile(key: FigureKey): Figure | undefined {
    const name = key.slice('message_bytes_'.length) as 'p50' | 'p95' | 'p99' | 'max';
    const value = this.cell.message_bytes?.[name];
    if (value === undefined) return undefined;
    if (this.#pairs === undefined || this.cell.unit_count !== undefined) return { value };
    const sorted = this.#pairs.bits.toSorted();
    const share = name === 'max' ? 1 : Number(name.slice(1)) / 100;
    return { value, ...quantileBounds(sorted, share) };
  }
}

function scaled(
  value: number,
  rate: Figure | undefined,
  factor: (rate: number, bound: number) => number,
): Figure {
  if (rate?.low === undefined || rate.high === undefined || rate.value === 0) return { value };
  const ends = [rate.low, rate.high].map((bound) => value * factor(rate.value, bound));
  return { value, low: Math.min(...ends), high: Math.max(...ends) };
}

function speedOf(speed: CellRecord['encode']): Figure | undefined {
  if (speed === undefined) return undefined;
  return { value: speed.speed, low: speed.low, high: speed.high };
}

/**
 * A 95 % interval of a quantile, in bytes: the order statistics whose ranks lie 1.96 standard deviations of a binomial count
 * around it. Its upper end is infinite where so few messages lie above that no observation bounds it.
 * Source: W. J. Conover, Practical Nonparametric Statistics, 1999, section 3.2 (from memory).
 * @param sortedBits  rising
 */
export function quantileBounds(
  sortedBits: Float64Array,
  share: number,
): { low: number; high: number } {
  const count = sortedBits.length;
  const spread = 1.96 * Math.sqrt(count * share * (1 - share));
  const lowRank = Math.floor(count * share - spread);
  const highRank = Math.ceil(count * share + spread) + 1;
  return {
    low: sortedBits[Math.min(count - 1, Math.max(0, lowRank - 1))] / 8,
    high: highRank > count ? Number.POSITIVE_INFINITY : sortedBits[highRank - 1] / 8,
  };
}
