/**
 * Fields of a record as tokens and extra bits: the encoder's and the decoder's steps around `table_of` and `expected_of`.
 */

const TOKEN_END = `
// Where the interval of a token ends.
fn token_end(slot, last) {
  if (slot == last) {
    return TOTAL;
  }
  return token_low[slot + 1];
}
`;

const RESIDUAL_OF = `
// What is left of the part's value.
fn residual_of(part) {
  let expected = expected_of(part);
  if (age != 0 && part_transform[part] <= BEFORE_BITS) {
    return values[part] ^ expected;
  }
  let mask = 0xffffffff >> (32 - part_width[part]);
  let difference = (values[part] - expected) & mask;
  if (difference > (mask >> 1)) {
    return 2 * (mask - difference) + 1;
  }
  return 2 * difference;
}
`;

const JOIN = `
// Sets the part's value from what was left of it.
fn join(part, residual) {
  let expected = expected_of(part);
  if (age != 0 && part_transform[part] <= BEFORE_BITS) {
    values[part] = residual ^ expected;
  } else {
    let difference = (residual >> 1) ^ (0 - (residual & 1));
    values[part] = (expected + difference) & (0xffffffff >> (32 - part_width[part]));
  }
}
`;

/** `encode_symbols(count)`. */
export const FIELDS_OUT = `${TOKEN_END}${RESIDUAL_OF}
fn put_part(part) {
  let from = table_of(part);
  let residual = residual_of(part);
  sizes[part] = size_of(residual);
  let slot = from + residual;
  let left = 0;
  if (residual > 15) {
    left = bit_length(residual) - 2;
    slot = from + 2 * left + 8 + (residual >> left);
  }
  let start = token_low[slot];
  put_interval(start, token_end(slot, from + part_tokens[part] - 1) - start, TOTAL);
  while (left != 0) {
    let piece = left;
    if (piece > PIECE) {
      piece = PIECE;
    }
    left = left - piece;
    let size = 1 << piece;
    put_interval((residual >> left) & (size - 1), 1, size);
  }
}

fn encode_symbols(count) {
  begin_range();
  age = 0;
  let at = 0;
  while (at < count && status == OK) {
    take_apart(at);
    let part = 0;
    while (part < PARTS) {
      put_part(part);
      part = part + 1;
    }
    advance();
    at = at + RECORD;
  }
  end_range();
}
`;

const GET_PART = `
fn get_part(part) {
  let from = table_of(part);
  let to = from + part_tokens[part];
  let slot = from;
  let last = to - 1;
  let target = get_target(TOTAL);
  while (to - slot > 1) {
    let middle = (slot + to) >> 1;
    if (token_low[middle] <= target) {
      slot = middle;
    } else {
      to = middle;
    }
  }
  let start = token_low[slot];
  take_interval(start, token_end(slot, last) - start);
  let residual = slot - from;
  if (residual > 15) {
    let left = 3 + ((residual - 16) >> 1);
    residual = (2 + (residual & 1)) << left;
    while (left != 0 && status == OK) {
      let piece = left;
      if (piece > PIECE) {
        piece = PIECE;
      }
      left = left - piece;
      let bits = get_target(1 << piece);
      take_interval(bits, 1);
      residual = residual + (bits << left);
    }
  }
  sizes[part] = size_of(residual);
  join(part, residual);
}
`;

/**
 * `decode_symbols(count)`.
 * @param checksCount  where the caller grants the count, which need not be whole records
 */
export function fieldsIn(checksCount: boolean): string {
  const check = `if (count % RECORD != 0) {
    status = COUNT;
    return 0;
  }
  `;
  return `${TOKEN_END}${JOIN}${GET_PART}
fn decode_symbols(count) {
  ${checksCount ? check : ''}begin_range();
  age = 0;
  let at = 0;
  while (at < count && status == OK) {
    let part = 0;
    while (part < PARTS && status == OK) {
      get_part(part);
      part = part + 1;
    }
    put_together(at);
    advance();
    at = at + RECORD;
  }
  if (status == OK) {
    end_range();
  }
}
`;
}
