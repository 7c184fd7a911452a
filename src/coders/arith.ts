import { arithDecoder } from './arith-decoder.ts';
import { arithEncoder, arithFiller } from './arith-encoder.ts';
import { arithPricer, decodeArithInPieces } from './arith-pieces.ts';
import { arithPrice } from './arith-price.ts';
import { ArithSettings, arithDeclaration } from './arith-settings.ts';
import { type ArithTables, arithTrainer, tablesFor } from './arith-tables.ts';
import type { Coder, CoderEntry, Tables } from './contract.ts';
import { remembered } from './cost.ts';
import { adaptiveCosts, adaptivePass } from './cost-adaptive.ts';
import { sentStaticCosts, sentStaticOperations } from './cost-sent-static.ts';
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
  const passOf = remembered((sequence, setup) => adaptivePass(settings, sequence, setup));
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
    inPieces: {
      decode: (input, setup, limits, taker) => {
        settings.check(setup);
        return decodeArithInPieces(settings, input, setup, limits, taker);
      },
      pricer: (setup) => {
        settings.check(setup);
        return arithPricer(settings, setup);
      },
    },
    price: (sequence, setup) => {
      settings.check(setup);
      return arithPrice(settings, sequence, setup);
    },
    costs(setup, longestCodedBytes, sequence) {
      const { policy } = setup;
      if (policy === 'shipped') {
        const { table } = tablesFor(setup, policy);
        return staticCosts(table, settings.rangeBits, setup.lengths, longestCodedBytes);
      }
      return policy === 'sent'
        ? sentStaticCosts(settings, sequence, setup, longestCodedBytes)
        : adaptiveCosts(settings, setup, passOf(sequence, setup), longestCodedBytes);
    },
    operations(sequence, setup) {
      const { policy } = setup;
      if (policy === 'shipped')
        return staticOperations(tablesFor(setup, policy).table, settings.rangeBits, sequence);
      return policy === 'sent'
        ? sentStaticOperations(settings, sequence, setup)
        : passOf(sequence, setup).operations;
    },
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
