import type { Setup } from '../coders/contract.ts';

/** What an exported function answers; the same numbers in every language. */
export const STATUS = {
  OK: 0,
  /** The output has no room for the whole message. */
  FULL: 1,
  /** A symbol lies outside the alphabet. */
  SYMBOL: 2,
  /** The symbols are not whole units, or more than a message can count. */
  COUNT: 3,
  /** No encoder with these tables writes such bytes. */
  CORRUPT: 4,
  /** The message holds more symbols than the caller has room for. */
  CAPACITY: 5,
} as const;

/** Symbols of a message are counted up to this. */
const MOST_COUNT = 2 ** 28;

/** Bits of a message beside its symbols at most: the count's code, at most 38 bits, and padding. */
export const COUNT_BITS = 38;

/** Constants of the frame's programs. */
export function frameConstants({ align, unitSymbols = 1 }: Setup): ReadonlyMap<string, number> {
  return new Map([
    ...Object.entries(STATUS).map(([name, value]): [string, number] => [name, value]),
    ['UNIT', unitSymbols],
    ['ALIGN_BYTES', align / 8],
    ['MOST_COUNT', MOST_COUNT],
  ]);
}

/** Bits out, highest first; at most 24 at once. */
export const BITS_OUT = `
state acc, acc_bits, out_at, out_end, status;

// Appends the low bits of a value, which has no others set.
fn put_bits(value, bits) {
  acc = (acc << bits) | value;
  acc_bits = acc_bits + bits;
  while (acc_bits >= 8) {
    acc_bits = acc_bits - 8;
    if (out_at == out_end) {
      status = FULL;
      return 0;
    }
    out[out_at] = acc >> acc_bits;
    out_at = out_at + 1;
  }
}

// Zeros up to the end of the byte, and of the alignment.
fn pad_out() {
  if (acc_bits != 0) {
    put_bits(0, 8 - acc_bits);
  }
  while (status == OK && out_at % ALIGN_BYTES != 0) {
    put_bits(0, 8);
  }
}
`;

/** Bits in, highest first; at most 24 at once. */
export const BITS_IN = `
state window, window_bits, in_at, in_end, status;

// The next bits as a number; zero once the bytes are used up, which ends the message as corrupt.
fn get_bits(bits) {
  while (window_bits < bits) {
    if (in_at == in_end) {
      status = CORRUPT;
      return 0;
    }
    window = (window << 8) | in[in_at];
    in_at = in_at + 1;
    window_bits = window_bits + 8;
  }
  window_bits = window_bits - bits;
  return (window >> window_bits) & ((1 << bits) - 1);
}

// What is left of the byte, and of the alignment, must be zeros.
fn pad_in() {
  if ((window & ((1 << window_bits) - 1)) != 0) {
    status = CORRUPT;
  }
  window_bits = 0;
  while (status == OK && in_at % ALIGN_BYTES != 0) {
    if (get_bits(8) != 0) {
      status = CORRUPT;
    }
  }
}
`;

const COUNT_OUT = `
// A count by Elias' code delta of the count plus 1.
fn put_count(count) {
  let value = count + 1;
  let length = 1;
  while ((value >> length) != 0) {
    length = length + 1;
  }
  let digits = 1;
  while ((length >> digits) != 0) {
    digits = digits + 1;
  }
  put_bits(length, 2 * digits - 1);
  value = value - (1 << (length - 1));
  if (length > 16) {
    put_bits(value >> 15, length - 16);
    put_bits(value & 0x7fff, 15);
  } else {
    put_bits(value, length - 1);
  }
}
`;

const COUNT_IN = `
// The count that Elias' code delta gives, less 1.
fn get_count() {
  let zeros = 0;
  while (get_bits(1) == 0) {
    zeros = zeros + 1;
    if (status != OK || zeros > 4) {
      status = CORRUPT;
      return 0;
    }
  }
  let length = (1 << zeros) + get_bits(zeros);
  if (length > 29) {
    status = CAPACITY;
    return 0;
  }
  let value = 1 << (length - 1);
  if (length > 16) {
    value = value + (get_bits(length - 16) << 15);
    value = value + get_bits(15);
  } else {
    value = value + get_bits(length - 1);
  }
  return value - 1;
}
`;

/**
 * The encoder's message: its count where the framing does not grant it, what `encode_symbols(count)` writes, and padding.
 * A coder's program defines `encode_symbols`.
 */
export function messageOut({ lengths }: Setup): string {
  const counted = lengths !== 'known';
  return `${counted ? COUNT_OUT : ''}
fn encode_message(count) {
  if (count % UNIT != 0 || count > MOST_COUNT) {
    status = COUNT;
    return 0;
  }
  ${counted ? 'put_count(count / UNIT);' : ''}
  encode_symbols(count);
  if (status == OK) {
    pad_out();
  }
}
`;
}

/**
 * The decoder's message: `capacity` is the room for symbols or, where the framing grants the count, that count. A coder's program
 * defines `decode_symbols(count)`. Gives the number of symbols.
 */
export function messageIn({ lengths }: Setup): string {
  const counted = lengths !== 'known';
  const count = counted
    ? `let count = get_count();
  if (status == OK && count > capacity / UNIT) {
    status = CAPACITY;
  }
  if (status != OK) {
    return 0;
  }
  count = count * UNIT;`
    : 'let count = capacity;';
  const end =
    lengths === 'link'
      ? `if (status == OK && in_at != in_end) {
    status = CORRUPT;
  }`
      : '';
  return `${counted ? COUNT_IN : ''}
fn decode_message(capacity) {
  ${count}
  decode_symbols(count);
  if (status == OK) {
    pad_in();
  }
  ${end}
  if (status != OK) {
    return 0;
  }
  return count;
}
`;
}
