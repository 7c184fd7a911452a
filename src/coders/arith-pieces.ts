import { PairTree } from '../models/pair-tree.ts';
import { StaticModel } from '../models/static-model.ts';
import { compileTable } from '../models/static-table.ts';
import type { SymbolModel } from '../models/symbol-model.ts';
import { Meter } from '../stages/meter.ts';
import { RangeDecoder } from '../stages/range-decoder.ts';
import { newSymbolArray } from '../symbols/sequence.ts';
import { readTable } from './arith-decoder.ts';
import { continuationOf } from './arith-encoder.ts';
import { pricedModel } from './arith-price.ts';
import type { ArithSettings } from './arith-settings.ts';
import { adaptiveModelFor, startsAtMessages, tablesFor } from './arith-tables.ts';
import type { DecodeLimits, Setup } from './contract.ts';
import type { DecodedTaker, PiecesInput, Pricer } from './in-pieces.ts';
import { wholeMessages } from './message-pieces.ts';
import { PiecesWalk } from './pieces-walk.ts';
import { PricedMessages } from './priced-messages.ts';

const BLOCK_SYMBOLS = 2 ** 14;

/** Decodes from a source that is read in pieces; the range decoder asks for more bytes where it runs out of them. */
export function* decodeArithInPieces(
  settings: ArithSettings,
  input: PiecesInput,
  setup: Setup,
  limits: DecodeLimits,
  taker: DecodedTaker,
): Generator<undefined, number, undefined> {
  const walk = new PiecesWalk(setup, input, limits);
  const { window } = walk;
  const stage = new RangeDecoder(window, settings.rangeBits);
  const continuation = continuationOf(setup.lengths);
  const symbols = newSymbolArray(setup.alphabetSize, BLOCK_SYMBOLS);
  let model: SymbolModel | undefined;
  if (setup.policy === 'shipped') model = new StaticModel(tablesFor(setup, 'shipped').table);
  else if (setup.policy !== 'sent') model = adaptiveModelFor(settings, setup);
  for (let count = walk.next(); count >= 0; count = walk.next()) {
    if (setup.policy === 'sent') {
      const perMessage = setup.reset === 'message';
      if (perMessage ? count > 0 : model === undefined)
        model = readTable(settings, setup, perMessage ? count : limits.maxSymbols, window, stage);
    }
    if (startsAtMessages(setup)) model?.reset();
    stage.begin();
    for (let left = count; left > 0; ) {
      const block = Math.min(left, BLOCK_SYMBOLS);
      model!.decode(stage, symbols, 0, block);
      taker.take(symbols, 0, block);
      yield;
      left -= block;
    }
    // The window may move while the end is looked for; the result counts from where it is then.
    const end = stage.end(continuation);
    walk.close(window.sourceBit(end));
    taker.end();
  }
  return window.sourcePosition;
}

/** The prices of `arithPrice`, chunk by chunk; the fit is counted by whoever has the counts. */
export function arithPricer(settings: ArithSettings, setup: Setup): Pricer {
  const { order, positions } = settings;
  const fitOrder = positions > 1 ? undefined : order;
  const meter = new Meter();
  const perMessage = setup.policy === 'sent' && setup.reset === 'message';
  if (perMessage) return sentPricer(settings, setup, fitOrder);
  const model = pricedModel(settings, setup);
  const starts = startsAtMessages(setup);
  return new PricedMessages(fitOrder, {
    begin() {
      if (starts) model.reset();
    },
    add: (symbols, from, to) => model.encode(symbols, from, to, meter),
    takeBits: () => meter.takeBits(),
  });
}

/** A table for each message needs it whole. */
function sentPricer(
  settings: ArithSettings,
  { alphabetSize }: Setup,
  fitOrder: number | undefined,
): Pricer {
  const { order, positions } = settings;
  const pairs = new PairTree(alphabetSize, order, positions);
  const meter = new Meter();
  const priced = new PricedMessages(fitOrder, {
    begin() {},
    add(symbols, from, to) {
      pairs.clear();
      pairs.count(symbols, from, to);
      const model = new StaticModel(compileTable(pairs.tree, order, 'none', 'exact'));
      model.encode(symbols, from, to, meter);
    },
    takeBits: () => meter.takeBits(),
  });
  const whole = wholeMessages((symbols, from, to) =>
    priced.push({
      alphabetSize,
      symbols: symbols.subarray(from, to),
      messageEnds: Uint32Array.of(to - from),
    }),
  );
  return { push: (chunk) => whole.push(chunk), finish: () => priced.finish() };
}
