import type { FieldPlan } from '../models/field-plan.ts';
import { FieldPredictor } from '../models/field-predictor.ts';
import { codePart } from '../models/field-records.ts';
import { ExactFieldTables, type TokenWriter } from '../models/field-tables.ts';
import { Meter } from '../stages/meter.ts';
import { fieldChoiceText } from '../symbols/field-choice.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Price, Setup } from './contract.ts';
import { recordCountOf } from './fields-records.ts';
import type { FieldsSettings } from './fields-settings.ts';
import { adaptiveTablesFor, startsAtMessages, tablesFor } from './fields-tables.ts';

function writerFor(
  settings: FieldsSettings,
  setup: Setup,
): { plan: FieldPlan; tables: TokenWriter } {
  if (setup.policy !== 'shipped') return adaptiveTablesFor(settings, setup);
  const { plan, weights } = tablesFor(setup, 'shipped');
  return { plan, tables: new ExactFieldTables(plan, weights) };
}

/**
 * Code lengths by the same record step as the encoder's, each field into a meter of its own; static
 * tables enter with their smoothed counts instead of quantised frequencies. There is no fit: the
 * class has no best member.
 */
export function fieldsPrice(
  settings: FieldsSettings,
  sequence: SymbolSequence,
  setup: Setup,
): Price {
  const { plan, tables } = writerFor(settings, setup);
  const { layout } = plan;
  const bytes = sequence.symbols as Uint8Array;
  const predictor = new FieldPredictor(plan);
  const meters = plan.choices.map(() => new Meter());
  const fieldBits = new Float64Array(plan.partCount);
  const messageIdealBits = new Float64Array(sequence.messageEnds.length);
  let idealBits = 0;
  let at = 0;
  for (let message = 0; message < messageIdealBits.length; message++) {
    const to = sequence.messageEnds[message];
    recordCountOf(to - at, layout);
    if (startsAtMessages(setup)) {
      predictor.start();
      tables.reset();
    }
    for (; at < to; at += layout.bytes) {
      layout.takeApart(bytes, at, predictor.values);
      for (let part = 0; part < meters.length; part++)
        codePart(predictor, tables, part, meters[part]);
      predictor.advance();
    }
    let bits = 0;
    for (let part = 0; part < meters.length; part++) {
      const own = meters[part].takeBits();
      fieldBits[part] += own;
      bits += own;
    }
    messageIdealBits[message] = bits;
    idealBits += bits;
  }
  const perField = layout.names.map((name, part) => ({
    name,
    idealBits: fieldBits[part],
    choice: fieldChoiceText(plan.choices[part]),
  }));
  return { idealBits, messageIdealBits, perField };
}
