import { BitReader } from '../bits/bit-reader.ts';
import { readSentTable } from '../models/sent-table.ts';
import { StaticModel } from '../models/static-model.ts';
import { compileTable } from '../models/static-table.ts';
import type { SymbolModel } from '../models/symbol-model.ts';
import { RangeDecoder } from '../stages/range-decoder.ts';
import { newSymbolArray } from '../symbols/sequence.ts';
import { continuationOf } from './arith-encoder.ts';
import type { ArithSettings } from './arith-settings.ts';
import { adaptiveModelFor, startsAtMessages, tablesFor } from './arith-tables.ts';
import type { CodedInput, Decoded, DecodeLimits, Decoder, Setup } from './contract.ts';
import { MessageWalk } from './message-frame.ts';
import { growSymbols } from './symbol-buffer.ts';

/** A message may claim more symbols than its bytes hold; room is made for so many at a time. */
const ROOM_SYMBOLS = 1 << 16;

export function arithDecoder(settings: ArithSettings, setup: Setup, limits: DecodeLimits): Decoder {
  return { decode: (input) => decode(settings, setup, limits, input) };
}

function decode(
  settings: ArithSettings,
  setup: Setup,
  limits: DecodeLimits,
  input: CodedInput,
): Decoded {
  const { alphabetSize } = setup;
  const reader = new BitReader(input.bytes);
  const stage = new RangeDecoder(reader, settings.rangeBits);
  const walk = new MessageWalk(reader, setup, input, limits);
  const continuation = continuationOf(setup.lengths);
  let model: SymbolModel | undefined;
  if (setup.policy === 'shipped') model = new StaticModel(tablesFor(setup, 'shipped').table);
  else if (setup.policy !== 'sent') model = adaptiveModelFor(settings, setup);
  let symbols = newSymbolArray(alphabetSize, 0);
  let filled = 0;
  for (let count = walk.next(); count >= 0; count = walk.next()) {
    if (setup.policy === 'sent') {
      const perMessage = setup.reset === 'message';
      if (perMessage ? count > 0 : model === undefined) {
        model = readTable(settings, setup, perMessage ? count : limits.maxSymbols, reader, stage);
      }
    }
    if (startsAtMessages(setup)) model?.reset();
    stage.begin();
    for (let left = count; left > 0; ) {
      const block = Math.min(left, ROOM_SYMBOLS);
      symbols = growSymbols(symbols, alphabetSize, filled, block);
      model!.decode(stage, symbols, filled, filled + block);
      filled += block;
      left -= block;
    }
    walk.close(stage.end(continuation));
  }
  return {
    sequence: {
      alphabetSize,
      symbols: symbols.subarray(0, filled),
      messageEnds: walk.messageEnds,
    },
    bitsConsumed: reader.position,
  };
}

/** Reads a table that was sent; the reader is left after it. */
export function readTable(
  settings: ArithSettings,
  setup: Setup,
  maxPairs: number,
  reader: BitReader,
  stage: RangeDecoder,
): SymbolModel {
  const { alphabetSize } = setup;
  const { order, positions } = settings;
  if (alphabetSize === 1) return new OneSymbol();
  stage.begin();
  const tree = readSentTable(alphabetSize, order, maxPairs, stage, positions);
  reader.seek(stage.end('any'));
  const bits = settings.totalBits(alphabetSize);
  return new StaticModel(compileTable(tree, order, 'none', { bits }));
}

/** The model of an alphabet of one symbol: nothing is coded. */
class OneSymbol implements SymbolModel {
  readonly intervalsPerSymbol = 0;
  reset(): void {}
  encode(): void {}
  decode(
    _: unknown,
    symbols: { fill(v: number, a: number, b: number): unknown },
    from: number,
    to: number,
  ): void {
    symbols.fill(0, from, to);
  }
}
