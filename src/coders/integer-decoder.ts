import { BitReader } from '../bits/bit-reader.ts';
import { CorruptStreamError } from '../errors/errors.ts';
import { newSymbolArray } from '../symbols/sequence.ts';
import type { CodedInput, Decoded, DecodeLimits, Decoder, Setup } from './contract.ts';
import { startMean } from './integer-encoder.ts';
import type { IntegerFamily } from './integer-family.ts';
import { integerTables, readParameter } from './integer-tables.ts';
import { MessageWalk } from './message-frame.ts';
import { growSymbols } from './symbol-buffer.ts';

/** @param given  the parameter, where the candidate gives it */
export function integerDecoder(
  family: IntegerFamily,
  setup: Setup,
  limits: DecodeLimits,
  given: number | undefined,
): Decoder {
  return { decode: (input) => decode(family, setup, limits, given, input) };
}

function decode(
  family: IntegerFamily,
  setup: Setup,
  limits: DecodeLimits,
  given: number | undefined,
  input: CodedInput,
): Decoded {
  const { alphabetSize, policy } = setup;
  const each = setup.reset === 'message';
  const reader = new BitReader(input.bytes);
  const walk = new MessageWalk(reader, setup, input, limits);
  const isAdaptive = given === undefined && (policy === 'learned' || policy === 'primed');
  const isSent = given === undefined && policy === 'sent';
  const mean = isAdaptive ? startMean(family, setup) : undefined;
  let parameter = given;
  if (policy === 'shipped') parameter ??= integerTables(family, setup).parameter;
  let symbols = newSymbolArray(alphabetSize, 0);
  let filled = 0;
  for (let count = walk.next(); count >= 0; count = walk.next()) {
    if (count > 0) {
      if (isSent && (each || parameter === undefined))
        parameter = readParameter(reader, family, alphabetSize);
      if (count > reader.limit - reader.position) {
        throw new CorruptStreamError('a message says it holds more symbols than its bits can', {
          bitOffset: reader.position,
          got: `${count} symbols of 1 bit or more`,
        });
      }
      symbols = growSymbols(symbols, alphabetSize, filled, count);
      const to = filled + count;
      if (mean === undefined) {
        family.decode(reader, symbols, filled, to, parameter!, alphabetSize);
      } else {
        if (each) mean.restart();
        family.decodeAdaptive(reader, symbols, filled, to, mean, alphabetSize);
      }
      filled = to;
    }
    walk.close(reader.position);
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
