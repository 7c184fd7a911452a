import { TABLE_BITS, TABLE_TOTAL } from './field-weights.ts';

/** Parts of a bit in which costs are counted where they decide something. */
export const COST_PER_BIT = 65_536;

const MANTISSA = 2 ** 25;

/**
 * log2 of an integer 1 … 2^25 in 1/65536 bit, rounded down, by integers alone, so that choices that
 * rest on it are the same on every machine: the mantissa is squared once for each bit of the
 * fraction. Off by at most one unit.
 */
export function integerLog2(value: number): number {
  const whole = 31 - Math.clz32(value);
  let mantissa = value * 2 ** (25 - whole);
  let fraction = 0;
  for (let bit = 0; bit < 16; bit++) {
    mantissa = Math.floor((mantissa * mantissa) / MANTISSA);
    fraction *= 2;
    if (mantissa >= 2 * MANTISSA) {
      mantissa = Math.floor(mantissa / 2);
      fraction++;
    }
  }
  return whole * COST_PER_BIT + fraction;
}

let costs: Uint32Array | undefined;

/** For each frequency 1 … {@link TABLE_TOTAL} of that total its cost in 1/65536 bit; made once. */
export function tableCosts(): Uint32Array {
  costs ??= Uint32Array.from({ length: TABLE_TOTAL + 1 }, (_, frequency) =>
    frequency === 0 ? 0 : TABLE_BITS * COST_PER_BIT - integerLog2(frequency),
  );
  return costs;
}
