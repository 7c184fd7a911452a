import { BugError, InputError } from '../errors/errors.ts';
import type { FieldChoice, FieldContext } from '../symbols/field-choice.ts';
import type { RecordLayout } from '../symbols/record-layout.ts';
import { weightCount } from './field-linear.ts';
import { TRANSFORM_CODES } from './field-residual.ts';
import { BUCKETS, tokenCount } from './field-token.ts';

export const NO_CONTEXT = 0;
export const LAST_RESIDUAL = 1;
export const LAST_VALUE = 2;
export const EARLIER_FIELD = 3;
export const EARLIER_VALUE = 4;
export const VALUE_BEFORE = 5;

const CONTEXT_CODES: Readonly<Record<FieldContext['kind'], number>> = {
  none: NO_CONTEXT,
  last: LAST_RESIDUAL,
  value: LAST_VALUE,
  field: EARLIER_FIELD,
  at: EARLIER_VALUE,
  was: VALUE_BEFORE,
};

/** Bounds between the size classes of a value. */
export const BOUNDS = BUCKETS - 1;

/** What both ends know of a field's values beforehand. */
export interface FieldFacts {
  /**
   * Stands in for the value before the first, or, where a choice names a field for that, is added
   * to the value of that field; unsigned, as in the layout.
   */
  readonly reference: number;
  /**
   * {@link BOUNDS} integers that never fall; a value in class i lies at or above i of them, by
   * {@link orderedValue}.
   */
  readonly bounds: readonly number[];
  /** Under `linear`, {@link weightCount} for each of {@link weightClassesOf}. */
  readonly weights?: Int16Array;
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

export const contextKindOf = (choice: FieldChoice): number => CONTEXT_CODES[choice.context.kind];

/**
 * Classes of a context that have weights of their own under `linear`. The own last residual has
 * none: it would depend on them.
 */
export const weightClassesOf = (kind: number): number =>
  kind === NO_CONTEXT || kind === LAST_RESIDUAL ? 1 : BUCKETS;

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
  /** The part that a context asks; its own where it asks none. */
  readonly contextParts: Uint16Array;
  /** The part beside which a first value is coded, or −1. */
  readonly firstParts: Int16Array;
  /** Parts that `linear` asks: those of a part from `inputStart[part]` on. */
  readonly inputs: Uint16Array;
  readonly inputStart: Uint32Array;
  /** Weights of `linear`: those of a part, class by class, from `weightStart[part]` on. */
  readonly weights: Int16Array;
  readonly weightStart: Uint32Array;
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
    this.contextParts = Uint16Array.from(choices, ({ context }, part) =>
      'name' in context ? askedPart(names, part, context.kind, context.name) : part,
    );
    this.firstParts = Int16Array.from(choices, ({ first }, part) =>
      first === undefined ? -1 : askedPart(names, part, 'first', first),
    );
    const inputs = choices.map((choice, part) =>
      (choice.inputs ?? []).map((name) => askedPart(names, part, 'linear', name)),
    );
    this.inputs = Uint16Array.from(inputs.flat());
    this.inputStart = startsOf(inputs.map((list) => list.length));
    const weights = facts.map((fact, part) => weightsOf(choices[part], fact));
    this.weights = Int16Array.from(weights.flatMap((list) => [...list]));
    this.weightStart = startsOf(weights.map((list) => list.length));
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

function startsOf(lengths: readonly number[]): Uint32Array {
  const starts = new Uint32Array(lengths.length + 1);
  for (let i = 0; i < lengths.length; i++) starts[i + 1] = starts[i] + lengths[i];
  return starts;
}

/** Weights of a part; untrained they are 0, and a linear prediction is the value before. */
function weightsOf(choice: FieldChoice, { weights }: FieldFacts): Int16Array {
  if (choice.transform !== 'linear') return new Int16Array(0);
  const count = weightClassesOf(contextKindOf(choice)) * weightCount(choice.inputs?.length ?? 0);
  if (weights !== undefined && weights.length !== count)
    throw new BugError('a plan of fields has the wrong number of weights');
  return weights ?? new Int16Array(count);
}

/** Parts that a choice may ask: any other for what it was, else one that lies before. */
function askedPart(
  names: readonly string[],
  part: number,
  how: 'field' | 'at' | 'was' | 'linear' | 'first',
  name: string,
): number {
  const asked = names.indexOf(name);
  const any = how === 'was' || how === 'linear';
  if (asked >= 0 && asked !== part && (any || asked < part)) return asked;
  const others = names.filter((_, other) => other !== part && (any || other < part));
  throw new InputError(`the field ${names[part]} cannot have ${roleOf(how)} ${how}:${name}`, {
    expected:
      others.length === 0
        ? 'none of another field: there is none that it could ask'
        : `${any ? 'another field of the record' : 'a field that lies before it in the record'}: ${others.join(', ')}`,
    got: name,
  });
}

function roleOf(how: string): string {
  if (how === 'linear') return 'the transform';
  return how === 'first' ? 'the start' : 'the context';
}
