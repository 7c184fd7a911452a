import { BugError } from '../errors/errors.ts';

/** What is known of a coded cell before it is held against a floor; all in bits. */
export interface CodedTotals {
  readonly carriedBits: number;
  readonly writtenBits: number;
  readonly endingBits: number;
  readonly paddingBits: number;
  readonly tableBits: number;
  readonly indexBits: number;
  readonly framingBits: number;
  readonly checkBits: number;
  readonly payloadBits: number;
  /** Absent for coders without probabilities. */
  readonly idealBits?: number;
  /** Absent where the class has no best member, or where its order is not estimable on these symbols. */
  readonly fitBits?: number;
}

/** The estimate that the account starts from, for the symbols that the cell codes; in bits. */
export interface FloorShare {
  readonly floorBits: number;
  readonly openingBits: number;
}

/** Names of the account's lines, in the order in which they are stacked. */
export const ACCOUNT_LINES = [
  'floor',
  'opening',
  'structure',
  'learning',
  'model',
  'above_floor',
  'rounding',
  'tables',
  'index',
  'framing',
  'ends',
  'check',
] as const;

export type AccountLine = (typeof ACCOUNT_LINES)[number];

/** One letter a line, used where a gap is spelled. The floor has none. */
export const LINE_LETTERS: Readonly<Record<Exclude<AccountLine, 'floor'>, string>> = {
  opening: 'o',
  structure: 's',
  learning: 'l',
  model: 'm',
  above_floor: '?',
  rounding: 'r',
  tables: 't',
  index: 'i',
  framing: 'f',
  ends: 'e',
  check: 'c',
};

/** The split of a cell's carried bits; lines that do not apply are absent, lines that are zero are 0. */
export type BitAccount = { readonly [line in AccountLine]?: number | undefined };

/**
 * Splits the carried bits of a cell into lines that sum to them.
 *
 * The integers are checked (what was booked must be what was carried); the real lines telescope by construction, each
 * being the difference of two totals: fit − floor − opening, ideal − fit, payload − ideal, written + ending + padding − payload.
 * @throws BugError when the integers do not sum to the carried bits
 */
export function bitAccount(totals: CodedTotals, floor: FloorShare): BitAccount {
  const { writtenBits, endingBits, paddingBits, tableBits, indexBits, framingBits, checkBits } =
    totals;
  const booked =
    writtenBits + endingBits + paddingBits + tableBits + indexBits + framingBits + checkBits;
  if (booked !== totals.carriedBits) {
    throw new BugError('the bits booked for a cell are not the bits carried', {
      expected: `${totals.carriedBits} bits`,
      got: `${booked} bits`,
    });
  }
  const base = floor.floorBits + floor.openingBits;
  const lines: Partial<Record<AccountLine, number>> = {
    floor: floor.floorBits,
    opening: floor.openingBits,
  };
  const { idealBits, fitBits, payloadBits } = totals;
  if (idealBits === undefined) {
    lines.above_floor = payloadBits - base;
  } else {
    if (fitBits === undefined) {
      lines.model = idealBits - base;
    } else {
      lines.structure = fitBits - base;
      lines.learning = idealBits - fitBits;
    }
    lines.rounding = payloadBits - idealBits;
  }
  lines.tables = tableBits;
  lines.index = indexBits;
  lines.framing = framingBits;
  lines.ends = writtenBits + endingBits + paddingBits - payloadBits;
  lines.check = checkBits;
  for (const name of ACCOUNT_LINES) {
    const value = lines[name];
    if (value !== undefined) lines[name] = Math.round(value * 1000) / 1000 + 0;
  }
  return lines;
}
