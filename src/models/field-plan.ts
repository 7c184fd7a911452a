import { BugError, InputError } from '../errors/errors.ts';
import type { FieldChoice } from '../symbols/field-choice.ts';
import type { RecordLayout } from '../symbols/record-layout.ts';
import { TRANSFORM_CODES } from './field-residual.ts';
import { BUCKETS, tokenCount } from './field-token.ts';

const NO_CONTEXT = 0;
export const LAST_RESIDUAL = 1;
export const LAST_VALUE = 2;
export const EARLIER_FIELD = 3;

/** Bounds between the size classes of a value. */
export const BOUNDS = BUCKETS - 1;

/** What both ends know of a field's values beforehand. */
export interface FieldFacts {
  /** Stands in for the value before the first; unsigned, as in the layout. */
  readonly reference: number;
  /**
   * {@link BOUNDS} integers that never fall; a value in class i lies at or above i of them, by
   * {@link orderedValue}.
   */
  readonly bounds: readonly number[];
}

/** A value turned so that unsigned order is the order of the field. */
export function orderedValue(value: number, width: number, signed: number): number {
  return signed === 1 ? (value ^ (1 << (width - 1))) >>> 0 : value;
}

/** Of a field of which nothing is known: reference 0, classes that part the range evenly. */
export function untrainedFacts(width: number): FieldFacts {
  const bounds = Array.from({ length: BOUNDS }, (_, i) =>
    // Where there are fewer values than classes, one value a class.
    width >= 3 ? (i + 1) * 2 ** (width - 3) : Math.min(i + 1, 2 ** width),
  );
  return { reference: 0, bounds };
}

/** Number of frequency tables of a context, that of a message's first record included. */
export function tableCountOf(kind: number): number {
  if (kind === NO_CONTEXT) return 2;
  return kind === LAST_RESIDUAL ? BUCKETS + 2 : BUCKETS + 1;
}

export function contextKindOf(choice: FieldChoice): number {
  return { none: NO_CONTEXT, last: LAST_RESIDUAL, value: LAST_VALUE, field: EARLIER_FIELD }[
    choice.context.kind
  ];
}

/**
 * How every part of a record is coded, in the form that loops over symbols read.
 *
 * Tables are numbered through all parts. Those of a part begin at `tableStart[part]`: first that of
 * a message's first record, then those of its contexts. The tokens of a table lie at
 * `slotStart[table] … slotStart[table + 1] − 1`.
 */
export class FieldPlan {
  readonly layout: RecordLayout;
  readonly choices: readonly FieldChoice[];
  readonly transforms: Uint8Array;
  readonly contexts: Uint8Array;
  /** Under {@link EARLIER_FIELD}, the part asked. */
  readonly contextParts: Uint16Array;
  readonly references: Uint32Array;
  /** {@link BOUNDS} a part. */
  readonly bounds: Float64Array;
  /** 32 − width. */
  readonly shifts: Uint8Array;
  /** What turns a value into an ordered one. */
  readonly flips: Int32Array;
  readonly tableStart: Uint32Array;
  readonly slotStart: Uint32Array;

  /**
   * @param choices  one a part
   * @param facts    one a part
   * @throws InputError for a context that asks a part that is not earlier
   */
  constructor(layout: RecordLayout, choices: readonly FieldChoice[], facts: readonly FieldFacts[]) {
    const { names, widths, signed } = layout;
    if (choices.length !== names.length || facts.length !== names.length)
      throw new BugError('a plan of fields has not one choice a part');
    this.layout = layout;
    this.choices = choices;
    this.transforms = Uint8Array.from(choices, (choice) => TRANSFORM_CODES[choice.transform]);
    this.contexts = Uint8Array.from(choices, contextKindOf);
    this.contextParts = Uint16Array.from(choices, (choice, part) =>
      earlierPart(names, choice, part),
    );
    this.references = Uint32Array.from(facts, (fact) => fact.reference);
    this.bounds = Float64Array.from(facts.flatMap((fact) => fact.bounds));
    this.shifts = widths.map((width) => 32 - width);
    this.flips = Int32Array.from(widths, (width, part) =>
      signed[part] === 1 ? 1 << (width - 1) : 0,
    );
    this.tableStart = new Uint32Array(names.length + 1);
    const slots: number[] = [0];
    for (let part = 0; part < names.length; part++) {
      const tables = tableCountOf(this.contexts[part]);
      this.tableStart[part + 1] = this.tableStart[part] + tables;
      for (let i = 0; i < tables; i++)
        slots.push(slots[slots.length - 1] + tokenCount(widths[part]));
    }
    this.slotStart = Uint32Array.from(slots);
  }

  get partCount(): number {
    return this.choices.length;
  }

  get tableCount(): number {
    return this.slotStart.length - 1;
  }

  /** Frequencies of all tables. */
  get slotCount(): number {
    return this.slotStart[this.tableCount];
  }
}

function earlierPart(names: readonly string[], choice: FieldChoice, part: number): number {
  const { context } = choice;
  if (context.kind !== 'field') return 0;
  const asked = names.indexOf(context.name);
  if (asked >= 0 && asked < part) return asked;
  throw new InputError(`the field ${names[part]} cannot have the context field:${context.name}`, {
    expected:
      part === 0
        ? 'none, last or value: no field lies before this one'
        : `a field that lies before it in the record: ${names.slice(0, part).join(', ')}`,
    got: context.name,
  });
}
