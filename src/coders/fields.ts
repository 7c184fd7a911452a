import { fieldChoiceText } from '../symbols/field-choice.ts';
import type { Coder, CoderEntry } from './contract.ts';
import { fieldsCosts } from './cost-fields.ts';
import { fieldsOperations } from './cost-fields-operations.ts';
import { fieldsDecoder } from './fields-decoder.ts';
import { fieldsEncoder, fieldsFiller } from './fields-encoder.ts';
import { fieldsPrice } from './fields-price.ts';
import { FieldsSettings, fieldsDeclaration } from './fields-settings.ts';
import { adaptiveTablesFor, type FieldsTables, fieldsTrainer, tablesFor } from './fields-tables.ts';
import type { ParameterValues } from './parameters.ts';

/**
 * A record's fields, each under its own transform and tables. What may surprise:
 * - bits that no field names are fields too, one a byte, called `@` and the byte;
 * - a message's first record is coded against what the train split says of each field, and counts
 *   in tables of its own;
 * - what is written of a message's length is the number of its records, or of its units under `fill`;
 * - without a map, `shipped` and `primed` choose for each field on the train split, and `learned`
 *   is refused.
 */
export const fields: CoderEntry = { declaration: fieldsDeclaration, create };

function create(values: ParameterValues): Coder {
  const settings = new FieldsSettings(values);
  return {
    declares: { ...fieldsDeclaration, policies: settings.policies },
    check: (setup) => settings.check(setup),
    trainer: (setup) => {
      settings.check(setup);
      return fieldsTrainer(settings, setup);
    },
    encoder: (setup) => {
      settings.check(setup);
      return fieldsEncoder(settings, setup);
    },
    filler: (setup) => {
      settings.check(setup);
      return fieldsFiller(settings, setup);
    },
    growsSteadily: () => true,
    decoder: (setup, limits) => {
      settings.check(setup);
      return fieldsDecoder(settings, setup, limits);
    },
    price: (sequence, setup) => {
      settings.check(setup);
      return fieldsPrice(settings, sequence, setup);
    },
    costs: (setup, longestCodedBytes) => {
      const { plan } =
        setup.policy === 'shipped'
          ? tablesFor(setup, 'shipped')
          : adaptiveTablesFor(settings, setup);
      return fieldsCosts(plan, setup, settings.rangeBits, longestCodedBytes);
    },
    operations: (sequence, setup) => fieldsOperations(settings, sequence, setup),
    decoderHolds: () => settings.rangeBits / 8,
    describeTables: (tables) => describe(tables as FieldsTables),
  };
}

/** A line a field, then all choices in the form that `map=` reads. */
function describe(tables: FieldsTables): string[] {
  const { plan, selections } = tables;
  const { names, widths } = plan.layout;
  const lines = names.map((name, part) => {
    const count = plan.tableStart[part + 1] - plan.tableStart[part];
    const tokens =
      plan.slotStart[plan.tableStart[part] + 1] - plan.slotStart[plan.tableStart[part]];
    const saved =
      selections === undefined
        ? ''
        : `; ${saving(selections[part].plainCost, selections[part].cost)}`;
    return `${name}, ${widths[part]} bits: ${fieldChoiceText(plan.choices[part])}, ${count} tables of ${tokens} tokens${saved}`;
  });
  lines.push(
    `${plan.slotCount} frequencies in ${plan.tableCount} tables, 2 bytes each: ${2 * plan.slotCount} bytes`,
    `map=${names.map((name, part) => `${name}:${fieldChoiceText(plan.choices[part])}`).join('+')}`,
  );
  return lines;
}

function saving(plainCost: number, cost: number): string {
  if (plainCost === cost) return 'nothing saves against raw';
  return `${Math.round((100 * (plainCost - cost)) / plainCost)} % less than raw on the half of the train split that priced it`;
}
