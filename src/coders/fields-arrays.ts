import {
  BOUNDS,
  EARLIER_FIELD,
  EARLIER_VALUE,
  type FieldPlan,
  LAST_RESIDUAL,
  LAST_VALUE,
  NO_CONTEXT,
  VALUE_BEFORE,
} from '../models/field-plan.ts';
import { TRANSFORM_CODES } from '../models/field-residual.ts';
import { MOST_TOKENS, tokenCount } from '../models/field-token.ts';
import { integerBytes } from './cost.ts';

/** A table as it lies in flash. */
export interface FlashArray {
  readonly name: string;
  readonly elementBytes: 1 | 2 | 4;
  readonly values: ArrayLike<number>;
  /** What it holds, in words. */
  readonly comment: string;
}

/** What of the programs a plan needs. */
export interface FieldShape {
  readonly parts: number;
  /** Parts whose lowest byte comes last. */
  readonly reversed: boolean;
  readonly delta2: boolean;
  /** Contexts that ask for the class of a value. */
  readonly classes: boolean;
  /** First values beside those of another part. */
  readonly beside: boolean;
  /** `wide`: predictions of so many bits that a sum of 32 does not hold them. */
  readonly linear: 'none' | 'narrow' | 'wide';
}

/** What a part's value is held against, as the programs tell it; bits are compared up to `BEFORE_BITS`. */
const HELD_AGAINST = {
  ZERO_BITS: 0,
  BEFORE_BITS: 1,
  ZERO: 2,
  BEFORE: 3,
  DELTA2: 4,
  LINEAR: 5,
} as const;

/** Contexts as the programs tell them. */
const ASKS = { NOTHING: 0, LAST_SIZE: 1, SIZE_OF: 2, VALUE_OF: 3, VALUE_BEFORE: 4 } as const;

const ASKED_BY_KIND: ReadonlyMap<number, number> = new Map([
  [NO_CONTEXT, ASKS.NOTHING],
  [LAST_RESIDUAL, ASKS.LAST_SIZE],
  [LAST_VALUE, ASKS.VALUE_BEFORE],
  [EARLIER_FIELD, ASKS.SIZE_OF],
  [EARLIER_VALUE, ASKS.VALUE_OF],
  [VALUE_BEFORE, ASKS.VALUE_BEFORE],
]);

/** A weighted sum has so many bits of fraction, and 32 in all. */
const MOST_NARROW_WIDTH = 32 - 12;

const heldAgainst = (transform: number, signed: number): number => {
  switch (transform) {
    case TRANSFORM_CODES.raw:
      return signed === 1 ? HELD_AGAINST.ZERO : HELD_AGAINST.ZERO_BITS;
    case TRANSFORM_CODES.xor:
      return HELD_AGAINST.BEFORE_BITS;
    case TRANSFORM_CODES.delta:
      return HELD_AGAINST.BEFORE;
    case TRANSFORM_CODES.delta2:
      return HELD_AGAINST.DELTA2;
    default:
      return HELD_AGAINST.LINEAR;
  }
};

const partsOf = (plan: FieldPlan): number[] => Array.from({ length: plan.partCount }, (_, i) => i);

/** Parts of which a context asks the class of a value. */
function classedParts(plan: FieldPlan): number[] {
  const asked = new Set(
    partsOf(plan)
      .filter((part) => [LAST_VALUE, EARLIER_VALUE, VALUE_BEFORE].includes(plan.contexts[part]))
      .map((part) => plan.contextParts[part]),
  );
  return [...asked].sort((a, b) => a - b);
}

export function fieldShape(plan: FieldPlan): FieldShape {
  const { layout, transforms, firstParts } = plan;
  const linear = partsOf(plan).filter((part) => transforms[part] === TRANSFORM_CODES.linear);
  return {
    parts: plan.partCount,
    reversed: layout.places.some(({ reversed }) => reversed),
    delta2: transforms.includes(TRANSFORM_CODES.delta2),
    classes: classedParts(plan).length > 0,
    beside: firstParts.some((part) => part >= 0),
    linear:
      linear.length === 0
        ? 'none'
        : linear.some((part) => layout.widths[part] > MOST_NARROW_WIDTH)
          ? 'wide'
          : 'narrow',
  };
}

/** Constants of the programs, those of the frame and the range coder apart. */
export function fieldConstants({ partCount, layout }: FieldPlan): ReadonlyMap<string, number> {
  return new Map<string, number>([
    ['PARTS', partCount],
    ['RECORD', layout.bytes],
    ['BOUNDS', BOUNDS],
    ...Object.entries(HELD_AGAINST),
    ...Object.entries(ASKS),
  ]);
}

const array = (name: string, values: ArrayLike<number>, comment: string): FlashArray => {
  let greatest = 1;
  for (let i = 0; i < values.length; i++) greatest = Math.max(greatest, values[i]);
  return { name, elementBytes: integerBytes(greatest) as 1 | 2 | 4, values, comment };
};

/** Tables that say how the parts of a record are coded; those that none of its parts asks are left out. */
export function fieldPlanArrays(plan: FieldPlan): FlashArray[] {
  const { layout, contexts, contextParts, firstParts, slotStart, tableStart } = plan;
  const { widths, signed, places } = layout;
  const parts = partsOf(plan);
  const classed = classedParts(plan);
  const { reversed, classes, beside, linear } = fieldShape(plan);
  const given = (condition: boolean, arrays: () => FlashArray[]): FlashArray[] =>
    condition ? arrays() : [];
  const each = <T>(list: readonly T[], of: (item: T) => number): number[] => list.map(of);
  return [
    array(
      'part_low_at',
      each(places, (p) => p.lowAt),
      'For each part: where its lowest byte lies,',
    ),
    array(
      'part_bytes',
      each(places, (p) => p.count),
      'in how many bytes it lies,',
    ),
    ...given(reversed, () => [
      array(
        'part_reversed',
        each(places, (p) => Number(p.reversed)),
        'whether that comes last,',
      ),
    ]),
    array(
      'part_shift',
      each(places, (p) => p.shift),
      'its lowest bit,',
    ),
    array('part_width', widths, 'how many bits it has,'),
    ...given(classes || beside || linear !== 'none', () => [
      array('part_signed', signed, "whether they are two's complement,"),
    ]),
    array(
      'part_transform',
      each(parts, (part) => heldAgainst(plan.transforms[part], signed[part])),
      'what its value is held against,',
    ),
    array(
      'part_context',
      each(parts, (p) => ASKED_BY_KIND.get(contexts[p])!),
      'what is asked,',
    ),
    array('part_asked', contextParts, 'of which part,'),
    array('part_tokens', Array.from(widths, tokenCount), 'how many tokens it has,'),
    array(
      'table_start',
      each(parts, (part) => slotStart[tableStart[part]]),
      'and where its first table begins.',
    ),
    array('references', plan.references, 'What the first value of a message is held against,'),
    ...given(beside, () => [
      array(
        'part_first',
        each(parts, (part) => (firstParts[part] < 0 ? part : firstParts[part])),
        'added to that of this part, where it is another.',
      ),
    ]),
    ...given(classes, () => [
      array(
        'part_bounds',
        each(parts, (part) => Math.max(0, classed.indexOf(part))),
        'Which bounds part its values into classes:',
      ),
      array(
        'bounds',
        classed.flatMap((part) =>
          Array.from(plan.bounds.subarray(part * BOUNDS, (part + 1) * BOUNDS), (b) => b - 1),
        ),
        'a value above is of a higher class; signs turned.',
      ),
    ]),
    ...given(linear !== 'none', () => [
      array('input_start', plan.inputStart, 'Where the parts begin that a prediction asks,'),
      // An array needs an element, and no part need ask another.
      array('inputs', plan.inputs.length === 0 ? [0] : plan.inputs, 'these parts,'),
      array('weight_start', plan.weightStart.slice(0, -1), 'where its weights begin,'),
      {
        name: 'weights',
        elementBytes: 2,
        values: Array.from(plan.weights, (weight) => weight & 0xffff),
        comment: "and these, in 1/4096, two's complement.",
      },
    ]),
  ];
}

export const flashBytesOf = (arrays: readonly FlashArray[]): number =>
  arrays.reduce((sum, { values, elementBytes }) => sum + values.length * elementBytes, 0);

/** For each token of each table where its interval begins; `frequencies` are those of all slots, at one total. */
export function tokenArray(plan: FieldPlan, frequencies: Uint32Array): FlashArray {
  const lows = new Uint32Array(plan.slotCount);
  for (let table = 0; table < plan.tableCount; table++) {
    let low = 0;
    for (let slot = plan.slotStart[table]; slot < plan.slotStart[table + 1]; slot++) {
      lows[slot] = low;
      low += frequencies[slot];
    }
  }
  return {
    name: 'token_low',
    elementBytes: 2,
    values: lows,
    comment: 'For each token of each table: where its interval begins.',
  };
}

/** Most bits of a record beside the frame: tokens of the least frequency, extra bits, what divisions drop. */
export function longestRecordBits({ layout }: FieldPlan, totalBits: number): number {
  return Array.from(layout.widths).reduce(
    (sum, width) =>
      sum + totalBits + 1 + (tokenCount(width) === MOST_TOKENS ? 30 : Math.max(0, width - 2)),
    0,
  );
}
