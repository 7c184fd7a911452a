import type { Candidate } from '../coders/candidate.ts';
import type { Setup } from '../coders/contract.ts';
import { expGolombFamily } from '../coders/exp-golomb.ts';
import { golombFamily } from '../coders/golomb.ts';
import { divisorWidth } from '../coders/golomb-choice.ts';
import type { IntegerFamily } from '../coders/integer-family.ts';
import { integerTables } from '../coders/integer-tables.ts';
import { riceFamily } from '../coders/rice.ts';
import { type ExportedCoder, messageBuffers } from './exporter.ts';
import { BITS_IN, BITS_OUT, frameConstants, messageIn, messageOut } from './frame-program.ts';
import { parseProgram } from './language-parser.ts';
import { checkedSymbols, DECODED_SYMBOLS } from './symbol-program.ts';

/** Zeros and the one that ends them. */
const UNARY_OUT = `
fn put_unary(zeros) {
  while (zeros > 23 && status == OK) {
    put_bits(0, 24);
    zeros = zeros - 24;
  }
  put_bits(1, zeros + 1);
}
`;

const UNARY_IN = `
// Zeros up to the one that ends them; more than any symbol has are refused.
fn get_unary(most) {
  let zeros = 0;
  while (get_bits(1) == 0) {
    zeros = zeros + 1;
    if (status != OK || zeros > most) {
      status = CORRUPT;
      return 0;
    }
  }
  return zeros;
}
`;

/** Programs of a family and the constants they need, for one parameter. */
interface FamilyPrograms {
  readonly out: string;
  readonly in: string;
  readonly constants: readonly (readonly [string, number])[];
}

const HELD_IN = `
  if (value >= ALPHABET) {
    status = CORRUPT;
    return 0;
  }
  return value;
}
`;

function ricePrograms(k: number, alphabetSize: number): FamilyPrograms {
  return {
    constants: [
      ['K', k],
      ['MOST_ZEROS', (alphabetSize - 1) >>> k],
    ],
    out: `
fn put_word(value) {
  put_unary(value >> K);
  put_bits(value & ((1 << K) - 1), K);
}
`,
    in: `
fn get_word() {
  let value = get_unary(MOST_ZEROS) << K;
  value = value | get_bits(K);${HELD_IN}`,
  };
}

function golombPrograms(divisor: number, alphabetSize: number): FamilyPrograms {
  const width = divisorWidth(divisor);
  // All remainders are of one length then.
  if (width > 0 && divisor === 2 ** width) return ricePrograms(width, alphabetSize);
  const constants: [string, number][] = [
    ['DIVISOR', divisor],
    ['WIDTH', width],
    ['SHORT', 2 ** width - divisor],
    ['MOST_ZEROS', Math.floor((alphabetSize - 1) / divisor)],
  ];
  if (width === 0) {
    return {
      constants,
      out: `
fn put_word(value) {
  put_unary(value);
}
`,
      in: `
fn get_word() {
  let value = get_unary(MOST_ZEROS);${HELD_IN}`,
    };
  }
  return {
    constants,
    out: `
fn put_word(value) {
  put_unary(value / DIVISOR);
  let rest = value % DIVISOR;
  if (rest < SHORT) {
    put_bits(rest, WIDTH - 1);
  } else {
    put_bits(rest + SHORT, WIDTH);
  }
}
`,
    in: `
fn get_word() {
  let value = get_unary(MOST_ZEROS) * DIVISOR;
  let rest = get_bits(WIDTH - 1);
  if (rest >= SHORT) {
    rest = 2 * rest + get_bits(1) - SHORT;
  }
  value = value + rest;${HELD_IN}`,
  };
}

function expGolombPrograms(k: number, alphabetSize: number): FamilyPrograms {
  return {
    constants: [
      ['K', k],
      ['MOST_ZEROS', 31 - Math.clz32(alphabetSize - 1 + 2 ** k) - k],
    ],
    out: `
fn put_word(value) {
  value = value + (1 << K);
  let width = K;
  while ((value >> width) > 1) {
    width = width + 1;
  }
  put_unary(width - K);
  value = value - (1 << width);
  if (width > 16) {
    put_bits(value >> 16, width - 16);
    put_bits(value & 0xffff, 16);
  } else {
    put_bits(value, width);
  }
}
`,
    in: `
fn get_word() {
  let width = K + get_unary(MOST_ZEROS);
  let value = 1 << width;
  if (width > 16) {
    value = value + (get_bits(width - 16) << 16);
    value = value + get_bits(16);
  } else {
    value = value + get_bits(width);
  }
  value = value - (1 << K);${HELD_IN}`,
  };
}

const families: ReadonlyMap<
  string,
  { family: IntegerFamily; programs: (parameter: number, alphabetSize: number) => FamilyPrograms }
> = new Map([
  ['rice', { family: riceFamily, programs: ricePrograms }],
  ['golomb', { family: golombFamily, programs: golombPrograms }],
  ['exp-golomb', { family: expGolombFamily, programs: expGolombPrograms }],
]);

/** `rice`, `golomb` and `exp-golomb`, their parameter trained or given. */
export function exportInteger(candidate: Candidate, setup: Setup): ExportedCoder {
  const { family, programs } = families.get(candidate.declaration.name)!;
  const given = candidate.values[family.key] as number | undefined;
  const parameter = given ?? integerTables(family, setup).parameter;
  const { alphabetSize } = setup;
  const own = programs(parameter, alphabetSize);
  const constants = new Map([
    ...frameConstants(setup),
    ...own.constants,
    ['ALPHABET', alphabetSize] as const,
  ]);
  const buffers = messageBuffers(alphabetSize);
  const out = [BITS_OUT, UNARY_OUT, own.out, checkedSymbols(alphabetSize), messageOut(setup)];
  return {
    encoder: {
      program: parseProgram(...out),
      entry: 'encode_message',
      entryGives: false,
      constants,
      tables: [],
      buffers: buffers.encoder,
    },
    decoder: {
      program: parseProgram(BITS_IN, UNARY_IN, own.in, DECODED_SYMBOLS, messageIn(setup)),
      entry: 'decode_message',
      entryGives: setup.lengths !== 'known',
      constants,
      tables: [],
      buffers: buffers.decoder,
    },
    longestSymbolBits: longestWord(family, parameter, alphabetSize),
    endingBits: 0,
    unseen: `The code has a word for every symbol, seen or not; ${family.key} is ${parameter}.`,
  };
}

function longestWord(family: IntegerFamily, parameter: number, alphabetSize: number): number {
  // Words never shorten as symbols grow, but for one bit of golomb's remainders at a new quotient.
  const last = family.wordBits(alphabetSize - 1, parameter);
  return last + (family.name === 'golomb' ? 1 : 0);
}
