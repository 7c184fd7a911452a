import { InputError } from '../errors/errors.ts';
import { nearestWord } from '../errors/nearest.ts';
import type { RecordShape } from './record.ts';

/**
 * How one field of a record is coded, in words: `transform` or `transform/context`, as in `delta`
 * or `delta/last`.
 *
 * Transforms, to the same field of the records before in the message:
 * - `raw`: the value itself;
 * - `delta`: its difference to the one before;
 * - `xor`: the bits in which it differs from the one before;
 * - `delta2`: its difference to the straight line through the two before.
 *
 * Contexts, which choose among the field's tables:
 * - none: one table;
 * - `last`: the size of the field's own last difference;
 * - `value`: where the field's own last value lies;
 * - `field:NAME`: the size of the difference of a field that comes earlier in this record.
 */
export const TRANSFORMS = ['raw', 'delta', 'xor', 'delta2'] as const;

export type FieldTransform = (typeof TRANSFORMS)[number];

export type FieldContext =
  | { readonly kind: 'none' | 'last' | 'value' }
  | { readonly kind: 'field'; readonly name: string };

export interface FieldChoice {
  readonly transform: FieldTransform;
  readonly context: FieldContext;
}

const FORM = `${TRANSFORMS.join(', ')}, alone or with /last, /value or /field:NAME`;

/**
 * Reads `transform` or `transform/context`.
 * @param field  the field that it is for, named in errors
 * @throws InputError for another form, with the nearest word
 */
export function parseFieldChoice(field: string, text: string): FieldChoice {
  const slash = text.indexOf('/');
  const word = (slash < 0 ? text : text.slice(0, slash)).trim();
  const transform = TRANSFORMS.find((t) => t === word);
  if (transform === undefined) refuse(field, text, nearestWord(word, TRANSFORMS));
  if (slash < 0) return { transform, context: { kind: 'none' } };
  const rest = text.slice(slash + 1).trim();
  if (rest === 'last' || rest === 'value') return { transform, context: { kind: rest } };
  const name = /^field:(.+)$/.exec(rest)?.[1];
  if (name === undefined) refuse(field, text, nearestWord(rest, ['last', 'value']));
  return { transform, context: { kind: 'field', name } };
}

function refuse(field: string, got: string, near: string | undefined): never {
  throw new InputError(`the choice for the field ${field} cannot be read`, {
    expected: FORM,
    got: JSON.stringify(got),
    ...(near === undefined ? {} : { advice: `Did you mean ${near}?` }),
  });
}

/** The form that {@link parseFieldChoice} reads. */
export function fieldChoiceText({ transform, context }: FieldChoice): string {
  if (context.kind === 'none') return transform;
  return `${transform}/${context.kind === 'field' ? `field:${context.name}` : context.kind}`;
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
    const { context } = parseFieldChoice(name, text);
    if (context.kind !== 'field') continue;
    checkName(names, context.name);
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
