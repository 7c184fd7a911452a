import { continuationOf } from '../coders/arith-encoder.ts';
import type { Lengths } from '../coders/contract.ts';

/**
 * A range coder of 32 bits, byte for byte that of `src/stages/range-encoder.ts`. A carry cannot pass the last byte that is not 255, so
 * the encoder keeps that byte and the number of bytes of 255 behind it, and no more of its message.
 */
const RANGE_OUT = `
state low, range, kept, kept_count, full_bytes;

fn begin_range() {
  low = 0;
  range = 0xffffffff;
  kept_count = 0;
  full_bytes = 0;
}

// Hands over the kept byte and those of 255 behind it.
fn release_bytes() {
  if (kept_count != 0) {
    put_bits(kept, 8);
    kept_count = 0;
  }
  while (full_bytes != 0) {
    put_bits(255, 8);
    full_bytes = full_bytes - 1;
  }
}

fn keep_byte(byte) {
  if (byte == 255 && kept_count != 0) {
    full_bytes = full_bytes + 1;
    return 0;
  }
  release_bytes();
  kept = byte;
  kept_count = 1;
}

// The kept byte grows by one, and what follows it turns to zeros.
fn carry_over() {
  kept = kept + 1;
  if (full_bytes == 0) {
    return 0;
  }
  put_bits(kept, 8);
  kept = 0;
  full_bytes = full_bytes - 1;
  while (full_bytes != 0) {
    put_bits(0, 8);
    full_bytes = full_bytes - 1;
  }
}

fn put_interval(start, frequency, total) {
  let step = range / total;
  let moved = low + step * start;
  range = step * frequency;
  if (moved < low) {
    carry_over();
  }
  low = moved;
  while (range < 0x1000000) {
    keep_byte(low >> 24);
    low = low << 8;
    range = range << 8;
  }
}

fn put_ending(value, bits) {
  release_bytes();
  if (bits > 16) {
    put_bits(value >> 16, bits - 16);
    put_bits(value & 0xffff, 16);
  } else {
    put_bits(value, bits);
  }
}
`;

/** How far a number has bits: 0 for 0. */
const BIT_LENGTH = `
fn bit_length(value) {
  let length = 0;
  while (value != 0) {
    value = value >> 1;
    length = length + 1;
  }
  return length;
}
`;

/** Ends with the fewest bits after which zeros stay inside the interval: where the message's end is known. */
const END_BY_ZEROS_OUT = `
fn end_range() {
  if (low == 0) {
    put_ending(0, 0);
    return 0;
  }
  let last = low + (range - 1);
  if (last < low) {
    carry_over();
    put_ending(0, 0);
    return 0;
  }
  let place = bit_length((low - 1) ^ last) - 1;
  put_ending(last >> place, 32 - place);
}
`;

const END_BY_ZEROS_IN = `
fn ending_bits(bottom) {
  if (bottom == 0) {
    return 0;
  }
  let last = bottom + (range - 1);
  if (last < bottom) {
    return 0;
  }
  return 33 - bit_length((bottom - 1) ^ last);
}
`;

/** Ends so that any continuation stays inside: where the decoder must see the end for itself. */
const END_FOR_ANY = `
// Place of the lowest bit of the ending.
fn ending_place(bottom) {
  let place = bit_length(range) - 1;
  let unit = 1 << place;
  let gap = (unit - (bottom & (unit - 1))) & (unit - 1);
  if (gap + unit > range) {
    place = place - 1;
  }
  return place;
}
`;

const END_FOR_ANY_OUT = `
fn end_range() {
  if (low == 0 && range == 0xffffffff) {
    return 0;
  }
  let place = ending_place(low);
  let unit = 1 << place;
  let moved = low + ((unit - (low & (unit - 1))) & (unit - 1));
  if (moved < low) {
    carry_over();
  }
  put_ending(moved >> place, 32 - place);
}
`;

const END_FOR_ANY_IN = `
fn ending_bits(bottom) {
  if (bottom == 0 && range == 0xffffffff) {
    return 0;
  }
  return 32 - ending_place(bottom);
}
`;

const RANGE_IN = `
state code, range, step, bit_at;

// The byte at a place; zero behind the last.
fn byte_at(place) {
  if (place < in_end) {
    return in[place];
  }
  return 0;
}

// The next eight bits, wherever they begin; four bytes of zeros may follow the message, not more.
fn next_byte() {
  let place = bit_at >> 3;
  if (bit_at + 8 > 8 * in_end + 32) {
    status = CORRUPT;
    return 0;
  }
  let shift = bit_at & 7;
  bit_at = bit_at + 8;
  return ((byte_at(place) << shift) | (byte_at(place + 1) >> (8 - shift))) & 255;
}

fn begin_range() {
  bit_at = 8 * in_at - window_bits;
  range = 0xffffffff;
  code = 0;
  let i = 0;
  while (i < 4) {
    code = (code << 8) | next_byte();
    i = i + 1;
  }
}

// Where in 0 to total - 1 the code lies.
fn get_target(total) {
  step = range / total;
  let target = code / step;
  if (target >= total) {
    status = CORRUPT;
    return 0;
  }
  return target;
}

fn take_interval(start, frequency) {
  code = code - step * start;
  range = step * frequency;
  while (range < 0x1000000) {
    code = (code << 8) | next_byte();
    range = range << 8;
    if (status != OK) {
      return 0;
    }
  }
}

// Finds where the ending ends: it follows from the last bits and what the interval is.
fn end_range() {
  let from = bit_at - 32;
  bit_at = from;
  let last = 0;
  let i = 0;
  while (i < 4) {
    last = (last << 8) | next_byte();
    i = i + 1;
  }
  let end = from + ending_bits(last - code);
  if (end > 8 * in_end) {
    status = CORRUPT;
    return 0;
  }
  in_at = end >> 3;
  window_bits = 0;
  get_bits(end & 7);
}
`;

/** `begin_range`, `put_interval(start, frequency, total)`, `end_range`. */
export function rangeOut(lengths: Lengths): string {
  return continuationOf(lengths) === 'zeros'
    ? RANGE_OUT + BIT_LENGTH + END_BY_ZEROS_OUT
    : RANGE_OUT + BIT_LENGTH + END_FOR_ANY + END_FOR_ANY_OUT;
}

/** `begin_range`, `get_target(total)`, `take_interval(start, frequency)`, `end_range`. */
export function rangeIn(lengths: Lengths): string {
  return continuationOf(lengths) === 'zeros'
    ? RANGE_IN + BIT_LENGTH + END_BY_ZEROS_IN
    : RANGE_IN + BIT_LENGTH + END_FOR_ANY + END_FOR_ANY_IN;
}

/** Bits that an ending takes at most, beyond the payload. */
export const RANGE_ENDING_BITS = 34;
