import { InputError } from '../errors/errors.ts';
import { FieldPlan, untrainedFacts } from '../models/field-plan.ts';
import type { RangeBits } from '../stages/range-precision.ts';
import { type FieldChoice, parseFieldChoice } from '../symbols/field-choice.ts';
import { RecordLayout } from '../symbols/record-layout.ts';
import type { Declaration, Setup, TablePolicy } from './contract.ts';
import type { ParameterValues } from './parameters.ts';

export const fieldsDeclaration: Declaration = {
  name: 'fields',
  summary:
    'Each field of a fixed record under a transform and tables of its own, all in one code string.',
  needsRecord: true,
  parameters: [
    {
      key: 'choice',
      kind: 'word',
      words: ['plan', 'auto'],
      standard: 'plan',
      bare: true,
      summary:
        'auto: transform, context and first value of each field by cost on the train split; plan: as the corpus says under fields, else auto',
    },
    {
      key: 'map',
      kind: 'text',
      form: 'NAME:CHOICE+NAME:CHOICE…, a CHOICE being raw, delta, xor, delta2 or linear:NAME (up to three names), alone or with /last, /value, /field:NAME, /at:NAME or /was:NAME, and then /first:NAME',
      example: 'dt:delta/last+supply:linear:return_air/was:flags',
      summary: 'the choice of each field, in place of the plan’s; fields not named are raw',
    },
    {
      key: 'range',
      kind: 'word',
      words: ['48', '32'],
      standard: '48',
      summary: 'bits of the coding interval: 48 loses nothing, 32 fits small devices',
    },
  ],
  policies: ['shipped', 'learned', 'primed'],
  resets: ['message', 'file', 'never'],
  needsWholeMessage: false,
  reference: false,
  maxAlphabetSize: 256,
  worstCase: 'at most 15 bits and its own width a field and record, and 2 bits a message',
  memory:
    'up to 10 tables a field, 2 bytes an entry: 2^w entries at a width of w ≤ 4 bits, 16 + 2 (w − 4) above; up to 64 weights of 2 bytes a linear field',
  source:
    'tokens with extra bits: common practice, no source; G. N. N. Martin 1979 (range coding); zigzag: common practice, no source; linear: C. F. Gauss 1809 (least squares), E. J. Schlossmacher 1973 (least absolute errors)',
};

/** A candidate's parameters, and what follows from them for a setup. */
export class FieldsSettings {
  readonly rangeBits: RangeBits;
  readonly #alwaysAuto: boolean;
  /** The candidate's own map, by field name. */
  readonly #map: Readonly<Record<string, string>> | undefined;

  /** Throws InputError where parameters contradict one another or the map cannot be read. */
  constructor(values: ParameterValues) {
    this.rangeBits = values['range'] === '32' ? 32 : 48;
    this.#alwaysAuto = values['choice'] === 'auto';
    const map = values['map'];
    this.#map = map === undefined ? undefined : readMap(String(map));
    if (this.#alwaysAuto && this.#map !== undefined) {
      throw new InputError('fields: auto and map= exclude each other', {
        coder: 'fields',
        key: 'map',
        advice: 'Leave one of them out.',
      });
    }
  }

  /** Policies that can ever work with these parameters. */
  get policies(): readonly TablePolicy[] {
    const { policies } = fieldsDeclaration;
    return this.#alwaysAuto ? policies.filter((policy) => policy !== 'learned') : policies;
  }

  /** The map that rules a setup; undefined: choices are made on the train split. */
  #mapFor(setup: Setup): Readonly<Record<string, string>> | undefined {
    return this.#alwaysAuto ? undefined : (this.#map ?? setup.fields);
  }

  /**
   * The record of a setup, taken apart.
   * @throws InputError that says what the candidate needs
   */
  layoutOf(setup: Setup): RecordLayout {
    const { record, alphabetSize } = setup;
    if (record === undefined || alphabetSize !== 256) {
      throw new InputError('fields codes the bytes of whole records, and these symbols are not', {
        coder: 'fields',
        key: 'record',
        expected:
          'record: {bytes: N, fields: {name: type@offset}} in the corpus, symbols: bytes, and messages of whole records',
        got:
          record === undefined ? 'symbols of which no record is known' : `${alphabetSize} symbols`,
        advice:
          'Name the record in the plan, or give try its --record and --field, with messages such as records=8.',
      });
    }
    return new RecordLayout(record);
  }

  /**
   * The choices that are given, one a part; undefined where the train split decides.
   * @throws InputError for a name that no part has, or a choice that cannot be read
   */
  choicesFor(setup: Setup, layout: RecordLayout): readonly FieldChoice[] | undefined {
    const map = this.#mapFor(setup);
    if (map === undefined) return undefined;
    const unknown = Object.keys(map).find((name) => !layout.names.includes(name));
    if (unknown !== undefined) {
      throw new InputError(`fields: the record has no field named ${unknown}`, {
        coder: 'fields',
        key: 'map',
        expected: `of ${layout.names.join(', ')}`,
        got: unknown,
      });
    }
    return layout.names.map((name) =>
      Object.hasOwn(map, name)
        ? parseFieldChoice(name, map[name])
        : { transform: 'raw', context: { kind: 'none' } },
    );
  }

  /** Throws InputError when the setup cannot work with these parameters. */
  check(setup: Setup): void {
    const { policy } = setup;
    const layout = this.layoutOf(setup);
    if (!fieldsDeclaration.policies.includes(policy)) {
      throw new InputError('fields does not work under these tables', {
        coder: 'fields',
        key: 'tables',
        expected: fieldsDeclaration.policies.join(', '),
        got: policy,
      });
    }
    const choices = this.choicesFor(setup, layout);
    if (choices !== undefined) untrainedPlan(layout, choices);
    else if (policy === 'learned') {
      throw new InputError(
        'fields: under learned nothing may be known from a train split, so it cannot choose how to code each field',
        {
          coder: 'fields',
          key: 'tables',
          expected: 'shipped or primed, or a choice for each field',
          got: 'learned and no choices',
          advice:
            'Run fields:auto under shipped first and give what it picked as map=… or in the corpus under fields.',
        },
      );
    }
  }
}

/** A plan of which nothing was trained. */
export function untrainedPlan(layout: RecordLayout, choices: readonly FieldChoice[]): FieldPlan {
  return new FieldPlan(layout, choices, [...layout.widths].map(untrainedFacts));
}

/** Reads `NAME:CHOICE+NAME:CHOICE…`. */
function readMap(text: string): Readonly<Record<string, string>> {
  const map: Record<string, string> = Object.create(null);
  for (const part of text.split('+')) {
    const colon = part.indexOf(':');
    const name = part.slice(0, Math.max(0, colon)).trim();
    if (name === '' || name in map) {
      throw new InputError(
        name === '' ? 'fields: cannot read map=' : `fields: map= names ${name} twice`,
        {
          coder: 'fields',
          key: 'map',
          expected: 'NAME:CHOICE+NAME:CHOICE…, as in dt:delta/last+supply:delta2',
          got: part,
        },
      );
    }
    map[name] = part.slice(colon + 1).trim();
    parseFieldChoice(name, map[name]);
  }
  return map;
}
