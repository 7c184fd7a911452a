import { InputError } from '../errors/errors.ts';
import { nearestWord } from '../errors/nearest.ts';
import type { RecordShape } from './record.ts';

/**
 * How one field of a record is coded, in words: `transform`, `transform/context`, and either with
 * `/first:NAME` after it, as in `delta`, `delta/last` or `linear:supply/was:humidity/first:supply`.
 *
 * Transforms, to the same field of the records before in the message:
 * - `raw`: the value itself;
 * - `delta`: its difference to the one before;
 * - `xor`: the bits in which it differs from the one before;
 * - `delta2`: its difference to the straight line through the two before;
 * - `linear`, `linear:NAME:NAME…`: its difference to a linear prediction from its own two before
 *   and from the named fields, with weights fitted on the train split.
 *
 * Contexts, which choose among the field's tables, and among the weights of `linear`:
 * - none: one table;
 * - `last`: the size of the field's own last difference;
 * - `value`: where the field's own last value lies;
 * - `field:NAME`: the size of the difference of a field that comes earlier in this record;
 * - `at:NAME`: where the value of a field that comes earlier in this record lies;
 * - `was:NAME`: where the last value of any other field lies.
 *
 * `first:NAME`: a message's first record is coded beside the value of a field that comes earlier in
 * the record, not beside the median of the train split.
 */
export const TRANSFORMS = ['raw', 'delta', 'xor', 'delta2'] as const;

export type FieldTransform = (typeof TRANSFORMS)[number] | 'linear';

export type FieldContext =
  | { readonly kind: 'none' | 'last' | 'value' }
  | { readonly kind: 'field' | 'at' | 'was'; readonly name: string };

export interface FieldChoice {
  readonly transform: FieldTransform;
  /** Fields that `linear` asks, at most {@link MOST_INPUTS}; none under other transforms. */
  readonly inputs?: readonly string[];
  readonly context: FieldContext;
  /** The field beside which a message's first value is coded. */
  readonly first?: string;
}

/** Fields that one `linear` may ask. */
export const MOST_INPUTS = 3;

const WORDS = [...TRANSFORMS, 'linear'] as const;
const FORM = `${TRANSFORMS.join(', ')} or linear:NAME (at most ${MOST_INPUTS} names, each after a colon), alone or with /last, /value, /field:NAME, /at:NAME or /was:NAME, and then /first:NAME`;

/**
 * Reads a choice.
 * @param field  the field that it is for, named in errors
 * @throws InputError for another form, with the nearest word
 */
export function parseFieldChoice(field: string, text: string): FieldChoice {
  const firstAt = text.lastIndexOf('/first:');
  const body = firstAt < 0 ? text : text.slice(0, firstAt);
  const first = firstAt < 0 ? undefined : text.slice(firstAt + '/first:'.length).trim();
  if (first === '') refuse(field, text, undefined);
  const [, head, rest] = /^(.*?)\/\s*((?:last|value)\s*|(?:field|at|was):.+)$/.exec(body) ?? [
    body,
    body,
  ];
  const [word, ...inputs] = head.split(':').map((part) => part.trim());
  const transform = WORDS.find((t) => t === word);
  if (transform === undefined) refuse(field, text, nearMiss(word));
  const most = transform === 'linear' ? MOST_INPUTS : 0;
  if (inputs.length > most || inputs.includes('') || new Set(inputs).size < inputs.length)
    refuse(field, text, undefined);
  return {
    transform,
    ...(inputs.length > 0 && { inputs }),
    context: contextOf(rest),
    ...(first !== undefined && { first }),
  };
}

/** @param text  one of the forms of a context, or undefined */
function contextOf(text: string | undefined): FieldContext {
  if (text === undefined) return { kind: 'none' };
  const colon = text.indexOf(':');
  if (colon < 0) return { kind: text.trim() as 'last' | 'value' };
  return {
    kind: text.slice(0, colon) as 'field' | 'at' | 'was',
    name: text.slice(colon + 1).trim(),
  };
}

/** The word that was meant where a transform, or a context after it, is not known. */
function nearMiss(head: string): string | undefined {
  const slash = head.indexOf('/');
  return slash < 0
    ? nearestWord(head, WORDS)
    : nearestWord(head.slice(slash + 1), ['last', 'value']);
}

function refuse(field: string, got: string, near: string | undefined): never {
  throw new InputError(`the choice for the field ${field} cannot be read`, {
    expected: FORM,
    got: JSON.stringify(got),
    ...(near === undefined ? {} : { advice: `Did you mean ${near}?` }),
  });
}

/** The form that {@link parseFieldChoice} reads. */
export function fieldChoiceText({ transform, inputs, context, first }: FieldChoice): string {
  const head = [transform, ...(inputs ?? [])].join(':');
  const { kind } = context;
  const middle = kind === 'none' ? '' : `/${'name' in context ? `${kind}:${context.name}` : kind}`;
  return `${head}${middle}${first === undefined ? '' : `/first:${first}`}`;
}

/** Names of other fields that a choice asks. */
function namesAskedBy({ inputs, context, first }: FieldChoice): readonly string[] {
  return [
    ...(inputs ?? []),
    ...('name' in context ? [context.name] : []),
    ...(first === undefined ? [] : [first]),
  ];
}

/**
 * Checks what can be known of a map of choices before the layout is made: that its fields exist and
 * its words are right.
 * @throws InputError that names the field
 */
export function checkFieldMap(
  record: RecordShape | undefined,
  map: Readonly<Record<string, string>>,
): void {
  const names = record?.fields.map((field) => field.name) ?? [];
  for (const [name, text] of Object.entries(map)) {
    checkName(names, name);
    for (const asked of namesAskedBy(parseFieldChoice(name, text))) checkName(names, asked);
  }
}

function checkName(names: readonly string[], name: string): void {
  // Bits that no field names are called after their place: see record-layout.ts.
  if (names.includes(name) || name.startsWith('@')) return;
  const near = nearestWord(name, names);
  throw new InputError(`the record has no field named ${JSON.stringify(name)}`, {
    expected:
      names.length === 0 ? 'a field declared under record.fields' : `one of ${names.join(', ')}`,
    got: name,
    ...(near === undefined ? {} : { advice: `Did you mean ${near}?` }),
  });
}
