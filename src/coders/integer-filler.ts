import type { Encoder, Setup } from './contract.ts';
import { type DraftWords, WordDraft } from './fill-drafts.ts';
import { fillingEncoder } from './fill-messages.ts';
import { startMean } from './integer-encoder.ts';
import type { IntegerFamily } from './integer-family.ts';
import { integerTables } from './integer-tables.ts';

/**
 * An encoder that fills messages with words of a family; undefined where each message is sent its own parameter, which
 * more symbols may change, or where the mean runs on from message to message.
 * @param given  the parameter, where the candidate gives it
 */
export function integerFiller(
  family: IntegerFamily,
  setup: Setup,
  given: number | undefined,
): Encoder | undefined {
  const words = draftWords(family, setup, given);
  return words === undefined ? undefined : fillingEncoder(setup, new WordDraft(setup, words));
}

function draftWords(
  family: IntegerFamily,
  setup: Setup,
  given: number | undefined,
): DraftWords | undefined {
  if (given === undefined && setup.policy === 'sent') return undefined;
  if (given === undefined && (setup.policy === 'learned' || setup.policy === 'primed')) {
    if (setup.reset !== 'message') return undefined;
    const mean = startMean(family, setup);
    return {
      encode: (writer, symbols, from, to) => family.encodeAdaptive(writer, symbols, from, to, mean),
      restart: () => mean.restart(),
    };
  }
  const parameter = given ?? integerTables(family, setup).parameter;
  return {
    encode: (writer, symbols, from, to) => family.encode(writer, symbols, from, to, parameter),
  };
}
