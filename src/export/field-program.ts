import type { FieldShape } from '../coders/fields-arrays.ts';

/**
 * Records by their fields, decision for decision those of `src/models/field-predictor.ts` and `field-records.ts`. What a plan does not
 * use is left out: steps are chosen by the tables' shape.
 *
 * A part's numbers matter modulo 2^width only, so that sums may wrap; where a linear prediction needs more than 32 bits, it is summed
 * in two halves.
 */

/** Places of a part's bytes, from the lowest on. */
const nextPlace = ({ reversed }: FieldShape): string =>
  reversed
    ? `if (part_reversed[part] != 0) {
        place = place - 1;
      } else {
        place = place + 1;
      }`
    : 'place = place + 1;';

const mask = 'let mask = 0xffffffff >> (32 - part_width[part]);';

const takeApart = (shape: FieldShape): string => `
// The values of the record that begins at a place.
fn take_apart(at) {
  let part = 0;
  while (part < PARTS) {
    let place = at + part_low_at[part];
    let value = 0;
    let shift = 0;
    while (shift < 8 * part_bytes[part]) {
      value = value | (symbols[place] << shift);
      shift = shift + 8;
      ${nextPlace(shape)}
    }
    ${mask}
    values[part] = (value >> part_shift[part]) & mask;
    part = part + 1;
  }
}
`;

const putTogether = (shape: FieldShape): string => `
// Writes the values as the record that begins at a place.
fn put_together(at) {
  let i = 0;
  while (i < RECORD) {
    symbols[at + i] = 0;
    i = i + 1;
  }
  let part = 0;
  while (part < PARTS) {
    let place = at + part_low_at[part];
    let value = values[part] << part_shift[part];
    let left = part_bytes[part];
    while (left != 0) {
      symbols[place] = symbols[place] | (value & 255);
      value = value >> 8;
      left = left - 1;
      ${nextPlace(shape)}
    }
    part = part + 1;
  }
}
`;

/** Contexts that ask for the class of a value. */
const CLASS_OF = `
// How many of its bounds a value of the part has passed.
fn class_of(part, value) {
  let ordered = value ^ (part_signed[part] << (part_width[part] - 1));
  let from = BOUNDS * part_bounds[part];
  let passed = 0;
  while (passed < BOUNDS && ordered > bounds[from + passed]) {
    passed = passed + 1;
  }
  return passed;
}
`;

const tableOf = ({ classes }: FieldShape): string => `${classes ? CLASS_OF : ''}
// Where the tokens of the part's table begin. The class of its context picks weights, too.
fn table_of(part) {
  let table = 0;
  weight_class = 0;
  if (age != 0) {
    table = 1;
    let kind = part_context[part];
    let asked = part_asked[part];
    if (kind == LAST_SIZE) {
      if (age == 2) {
        table = 2 + sizes[part];
      }
    } else if (kind == SIZE_OF) {
      weight_class = sizes[asked];
    }${
      classes
        ? ` else if (kind == VALUE_OF) {
      weight_class = class_of(asked, values[asked]);
    } else if (kind == VALUE_BEFORE) {
      weight_class = class_of(asked, before[asked]);
    }`
        : ''
    }
    table = table + weight_class;
  }
  return table_start[part] + table * part_tokens[part];
}

// The size class of a residual.
fn size_of(residual) {
  let length = bit_length(residual);
  if (length > 7) {
    return 7;
  }
  return length;
}
`;

const NUMBER_OF = `
// The number that a value of the part stands for, modulo 2^32.
fn number_of(value, part) {
  let flip = part_signed[part] << (part_width[part] - 1);
  return (value ^ flip) - flip;
}
`;

const WEIGHT_AT = `
fn weight_at(at) {
  return (weights[at] ^ 0x8000) - 0x8000;
}
`;

/** Sums of 32 bits: enough where 12 bits of fraction and the width fit. */
const LINEAR = `${WEIGHT_AT}
// The value before, and a weighted sum of changes and distances.
fn linear(part) {
  let from = input_start[part];
  let to = input_start[part + 1];
  let at = weight_start[part] + weight_class * (2 + 2 * (to - from));
  let own = number_of(before[part], part);
  let sum = 2048 + 256 * weight_at(at);
  sum = sum + (own - number_of(before_that[part], part)) * weight_at(at + 1);
  while (from < to) {
    let input = inputs[from];
    at = at + 2;
    let last = number_of(before[input], input);
    let change = last - number_of(before_that[input], input);
    if (input < part) {
      change = number_of(values[input], input) - last;
    }
    sum = sum + change * weight_at(at) + (last - own) * weight_at(at + 1);
    from = from + 1;
  }
  return own + (sum >> 12);
}
`;

/** The same with sums of 64 bits in two halves. */
const WIDE_LINEAR = `${WEIGHT_AT}
state sum_low, sum_high;

// Adds a value of the part times a weight.
fn add_product(value, part, weight) {
  let number = number_of(value, part);
  let size = weight;
  if ((weight >> 31) != 0) {
    size = 0 - weight;
  }
  let upper = (number >> 16) * size;
  let lower = (number & 0xffff) * size;
  let product = lower + (upper << 16);
  let high = (upper >> 16) - (part_signed[part] & (number >> 31)) * size;
  if (product < lower) {
    high = high + 1;
  }
  if (size != weight) {
    if (sum_low < product) {
      high = high + 1;
    }
    sum_low = sum_low - product;
    sum_high = sum_high - high;
  } else {
    sum_low = sum_low + product;
    if (sum_low < product) {
      high = high + 1;
    }
    sum_high = sum_high + high;
  }
}

// The value before, and a weighted sum of changes and distances.
fn linear(part) {
  let from = input_start[part];
  let to = input_start[part + 1];
  let at = weight_start[part] + weight_class * (2 + 2 * (to - from));
  let weight = weight_at(at);
  sum_low = 2048 + 256 * weight;
  sum_high = 0;
  if ((sum_low >> 31) != 0) {
    sum_high = 0xffffffff;
  }
  weight = weight_at(at + 1);
  add_product(before[part], part, weight);
  add_product(before_that[part], part, 0 - weight);
  while (from < to) {
    let input = inputs[from];
    at = at + 2;
    weight = weight_at(at);
    if (input < part) {
      add_product(values[input], input, weight);
      add_product(before[input], input, 0 - weight);
    } else {
      add_product(before[input], input, weight);
      add_product(before_that[input], input, 0 - weight);
    }
    weight = weight_at(at + 1);
    add_product(before[input], input, weight);
    add_product(before[part], part, 0 - weight);
    from = from + 1;
  }
  return number_of(before[part], part) + ((sum_low >> 12) | (sum_high << 20));
}
`;

function expectedOf({ linear, delta2, beside }: FieldShape): string {
  const sums = linear === 'none' ? '' : linear === 'wide' ? WIDE_LINEAR : LINEAR;
  return `${linear === 'none' && !beside ? '' : NUMBER_OF}${sums}
// What the part's value is held against.
fn expected_of(part) {
  if (age == 0) {
    ${
      beside
        ? `let other = part_first[part];
    if (other != part) {
      return references[part] + number_of(values[other], other);
    }
    `
        : ''
    }return references[part];
  }
  let kind = part_transform[part];
  if (kind == ZERO_BITS || kind == ZERO) {
    return 0;
  }${
    linear === 'none'
      ? ''
      : `
  if (kind == LINEAR) {
    return linear(part);
  }`
  }${
    delta2
      ? `
  if (kind == DELTA2) {
    return 2 * before[part] - before_that[part];
  }`
      : ''
  }
  return before[part];
}
`;
}

const advance = ({ linear, delta2 }: FieldShape): string => `
// Ends a record.
fn advance() {
  let part = 0;
  while (part < PARTS) {${
    linear === 'none' && !delta2
      ? ''
      : `
    before_that[part] = before[part];
    if (age == 0) {
      before_that[part] = values[part];
    }`
  }
    before[part] = values[part];
    part = part + 1;
  }
  if (age < 2) {
    age = age + 1;
  }
}
`;

const state = ({ parts }: FieldShape): string => `
state age, weight_class, values[${parts}], before[${parts}], before_that[${parts}], sizes[${parts}];
`;

/** What both ends do: `table_of`, `expected_of`, `size_of`, `advance`. */
export const sharedFields = (shape: FieldShape): string =>
  state(shape) + tableOf(shape) + expectedOf(shape) + advance(shape);

/** `take_apart(at)`, `put_together(at)`. */
export const recordOut = takeApart;
export const recordIn = putTogether;
