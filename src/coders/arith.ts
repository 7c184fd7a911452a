import { arithDecoder } from './arith-decoder.ts';
import { arithEncoder, arithFiller } from './arith-encoder.ts';
import { arithPrice } from './arith-price.ts';
import { ArithSettings, arithDeclaration } from './arith-settings.ts';
import { type ArithTables, arithTrainer, tablesFor } from './arith-tables.ts';
import type { Coder, CoderEntry, Tables } from './contract.ts';
import { staticCosts, staticOperations } from './cost-static.ts';
import type { ParameterValues } from './parameters.ts';

/**
 * Order-k arithmetic coding. What may surprise:
 * - a message's code string ends by itself where its end is not known, so no byte length is ever paid for;
 * - an adaptive model's `sent` cell does not exist as such: `sent` carries static tables of order k alone, no back-off;
 * - `backoff`, `counts` and `halve_at` speak of adaptive models, `total_bits` and `unseen` of static ones; the others are
 *   ignored, so that one candidate can run under every policy;
 * - `position=N` counts from a message's start where contexts start there, and runs on over messages where they run on.
 */
export const arith: CoderEntry = { declaration: arithDeclaration, create };

function create(values: ParameterValues): Coder {
  const settings = new ArithSettings(values);
  return {
    declares: arithDeclaration,
    check: (setup) => settings.check(setup),
    trainer: (setup) => {
      settings.check(setup);
      return arithTrainer(settings, setup);
    },
    encoder: (setup) => {
      settings.check(setup);
      return arithEncoder(settings, setup);
    },
    filler: (setup) => {
      settings.check(setup);
      return arithFiller(settings, setup);
    },
    growsSteadily: (setup) => setup.policy !== 'sent',
    decoder: (setup, limits) => {
      settings.check(setup);
      return arithDecoder(settings, setup, limits);
    },
    price: (sequence, setup) => {
      settings.check(setup);
      return arithPrice(settings, sequence, setup);
    },
    costs: (setup, longestCodedBytes) =>
      setup.policy === 'shipped'
        ? staticCosts(tablesFor(setup, 'shipped').table, settings.rangeBits, longestCodedBytes)
        : undefined,
    operations: (sequence, setup) =>
      setup.policy === 'shipped'
        ? staticOperations(tablesFor(setup, 'shipped').table, settings.rangeBits, sequence)
        : undefined,
    decoderHolds: () => settings.rangeBits / 8,
    describeTables: (tables) => describe(tables as ArithTables, settings),
  };
}

function describe(tables: Tables & ArithTables, settings: ArithSettings): string[] {
  const { order, positions } = settings;
  const place = positions === 1 ? '' : `, for each of ${positions} positions`;
  if (tables.policy === 'primed')
    return [`adaptive order-${order} model after the train split${place}`];
  const { tree } = tables.pairs;
  const strings = tree.nodeCount - tree.startCount;
  const lines = [
    `${strings} strings of 1 to ${order + 1} symbols counted in ${tree.alphabetSize} symbols' alphabet${place}`,
  ];
  if (tables.policy === 'shipped') {
    const { table } = tables;
    let contexts = 0;
    for (const total of table.totals) if (total > 0) contexts++;
    lines.push(
      `${contexts} contexts with ${table.symbols.length} entries, totals of ${table.totals[0]}`,
    );
  }
  return lines;
}
