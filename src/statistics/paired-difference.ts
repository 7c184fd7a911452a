import { InputError } from '../errors/errors.ts';
import { percentileInterval, type Resampling, resampleRoom } from './bootstrap.ts';
import { SeededGenerator } from './generator.ts';

/** The same units (messages, or contiguous blocks of them) coded twice. All arrays have one entry a unit. */
export interface PairedUnits extends Resampling {
  readonly bitsA: Float64Array;
  readonly bitsB: Float64Array;
  /** Symbols of each unit; 0 is allowed, not everywhere. */
  readonly symbols: Float64Array;
}

/** Bits per symbol that B needs beyond A, with a percentile interval. */
export interface PairedDifference {
  /** (Σ bitsB − Σ bitsA) ÷ Σ symbols: below 0 where B needs less. */
  readonly difference: number;
  readonly low: number;
  readonly high: number;
  readonly units: number;
  /** The interval excludes 0, and there are enough units for an interval to say so. */
  readonly decided: boolean;
}

/** Fewest units that can decide: even if all point the same way, chance does that in 2^(1 − units) of cases. */
function leastUnits(level: number): number {
  return Math.ceil(1 - Math.log2(1 - level));
}

/**
 * How many bits per symbol more B needs than A, by resampling whole units, so that what both find hard cancels.
 *
 * Units must be about independent: neighbouring messages of one source are not, so group them first ({@link intoBlocks}).
 * @throws InputError for arrays of unequal length, no units, or no symbols at all
 * Cost: units · repetitions draws; nothing is allocated per draw.
 * Source: Efron & Tibshirani 1993, §13.3 (percentile interval), §8.5 (resampling pairs and blocks); the least number of
 * units is that of the two-sided sign test.
 */
export function pairedDifference(paired: PairedUnits): PairedDifference {
  const { bitsA, bitsB, symbols } = paired;
  const level = paired.level ?? 0.95;
  const units = bitsA.length;
  if (bitsB.length !== units || symbols.length !== units) {
    throw new InputError('paired figures must stand for the same units', {
      expected: `${units} figures in each array`,
      got: `${bitsB.length} and ${symbols.length}`,
    });
  }
  const excess = new Float64Array(units);
  let excessTotal = 0;
  let symbolTotal = 0;
  for (let i = 0; i < units; i++) {
    excess[i] = bitsB[i] - bitsA[i];
    excessTotal += excess[i];
    symbolTotal += symbols[i];
  }
  if (!(symbolTotal > 0)) {
    throw new InputError('a difference per symbol needs at least one symbol', {
      got: `${units} units with ${symbolTotal} symbols`,
    });
  }
  const generator = new SeededGenerator(paired.seed);
  const rates = resampleRoom(paired.repetitions);
  for (let r = 0; r < rates.length; r++) {
    let bits = 0;
    let count = 0;
    // A resample of empty units only has no rate; it is drawn again.
    while (count === 0) {
      bits = 0;
      for (let i = 0; i < units; i++) {
        const unit = generator.integer(0, units - 1);
        bits += excess[unit];
        count += symbols[unit];
      }
    }
    rates[r] = bits / count;
  }
  const { low, high } = percentileInterval(rates, level);
  return {
    difference: excessTotal / symbolTotal,
    low,
    high,
    units,
    decided: units >= leastUnits(level) && (low > 0 || high < 0),
  };
}

/**
 * Sums of contiguous blocks of `values`, in order; blocks differ by at most one in how many values they hold. Arrays of
 * one length are cut at the same places, so pairs stay pairs.
 *
 * @param blocks  1 or more; never more blocks than values come back
 */
export function intoBlocks(values: Float64Array, blocks: number): Float64Array {
  if (!Number.isSafeInteger(blocks) || blocks < 1) {
    throw new InputError('values are grouped into at least one block', { got: String(blocks) });
  }
  const sums = new Float64Array(Math.min(blocks, values.length));
  let from = 0;
  for (let b = 0; b < sums.length; b++) {
    const to = Math.floor(((b + 1) * values.length) / sums.length);
    for (; from < to; from++) sums[b] += values[from];
  }
  return sums;
}
