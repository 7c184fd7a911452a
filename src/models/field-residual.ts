import type { FieldTransform } from '../symbols/field-choice.ts';

/**
 * A field's value as what is left after its transform, and back. Values are unsigned integers below
 * 2^width; differences wrap around there, so that a residual is below 2^width too, and the way back
 * always exists.
 */

export const RAW = 0;
const DELTA = 1;
const XOR = 2;
const DELTA2 = 3;
/** Its expectation is no matter of the field alone: see field-predictor.ts. */
export const LINEAR = 4;

export const TRANSFORM_CODES: Readonly<Record<FieldTransform, number>> = {
  raw: RAW,
  delta: DELTA,
  xor: XOR,
  delta2: DELTA2,
  linear: LINEAR,
};

/**
 * 0, −1, 1, −2 … as 0, 1, 2, 3 …, for a difference that wraps around at 2^width; `shift` is 32 −
 * width.
 */
export function zigzagBetween(value: number, expected: number, shift: number): number {
  const difference = ((value - expected) << shift) >> shift;
  return ((difference << 1) ^ (difference >> 31)) >>> 0;
}

/** The value whose {@link zigzagBetween} to `expected` is `residual`. */
export function valueBeside(residual: number, expected: number, shift: number): number {
  const difference = (residual >>> 1) ^ -(residual & 1);
  return ((expected + difference) << shift) >>> shift;
}

/**
 * What is left of a value that is not the first of its message.
 * @param before, beforeThat  the same field of the last two records; `beforeThat` equals `before`
 *   where there is only one
 * @param shift   32 − width
 * @param signed  1 where a value is two's complement, which `raw` heeds
 */
export function residualOf(
  transform: number,
  value: number,
  before: number,
  beforeThat: number,
  shift: number,
  signed: number,
): number {
  if (transform === DELTA) return zigzagBetween(value, before, shift);
  if (transform === XOR) return (value ^ before) >>> 0;
  if (transform === DELTA2) return zigzagBetween(value, 2 * before - beforeThat, shift);
  return signed === 1 ? zigzagBetween(value, 0, shift) : value;
}

/** The value that {@link residualOf} came from. */
export function valueFrom(
  transform: number,
  residual: number,
  before: number,
  beforeThat: number,
  shift: number,
  signed: number,
): number {
  if (transform === DELTA) return valueBeside(residual, before, shift);
  if (transform === XOR) return (residual ^ before) >>> 0;
  if (transform === DELTA2) return valueBeside(residual, 2 * before - beforeThat, shift);
  return signed === 1 ? valueBeside(residual, 0, shift) : residual;
}
