import { BitWriter } from '../bits/bit-writer.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import type { Coded, Encoder, Setup } from './contract.ts';
import { SymbolCounts } from './huffman-counts.ts';
import type { IntegerFamily } from './integer-family.ts';
import { RunningMean } from './integer-mean.ts';
import { integerTables, writeParameter } from './integer-tables.ts';
import { writeSymbolCount } from './message-frame.ts';
import { MessageLedger } from './message-ledger.ts';
import { MessagePieces, wholeMessages } from './message-pieces.ts';

/** The mean that an adaptive unit starts with. */
export function startMean(family: IntegerFamily, setup: Setup): RunningMean {
  return new RunningMean(
    setup.alphabetSize,
    setup.policy === 'primed' ? integerTables(family, setup) : undefined,
  );
}

/**
 * Codes messages: count, parameter if sent, words, padding.
 * @param given  the parameter, where the candidate gives it
 */
export function integerEncoder(
  family: IntegerFamily,
  setup: Setup,
  given: number | undefined,
): Encoder {
  const writer = new BitWriter();
  const ledger = new MessageLedger(setup.align);
  const finishWith = (pieces: MessagePieces): Encoder => ({
    push: (chunk) => pieces.push(chunk),
    finish(): Coded {
      pieces.finish();
      return ledger.finish(writer);
    },
  });
  const begin = (symbolCount: number) => {
    ledger.framingBits += writeSymbolCount(writer, setup, symbolCount);
  };
  const sendParameter = (parameter: number) => {
    ledger.tableBits += writeParameter(writer, family, setup.alphabetSize, parameter);
  };
  const bookWords = (from: number) => {
    ledger.writtenBits += writer.position - from;
    ledger.payloadBits += writer.position - from;
  };

  if (given === undefined && (setup.policy === 'learned' || setup.policy === 'primed')) {
    const mean = startMean(family, setup);
    return finishWith(
      new MessagePieces({
        begin(symbolCount) {
          begin(symbolCount);
          if (setup.reset === 'message') mean.restart();
        },
        take(symbols, from, to) {
          const start = writer.position;
          family.encodeAdaptive(writer, symbols, from, to, mean);
          bookWords(start);
        },
        end: () => ledger.close(writer),
      }),
    );
  }

  if (given === undefined && setup.policy === 'sent' && setup.reset === 'message') {
    const counts = new SymbolCounts(setup.alphabetSize);
    const chooser = family.chooser();
    return finishWith(
      wholeMessages((symbols: SymbolArray, from: number, to: number) => {
        begin(to - from);
        if (to > from) {
          counts.clear();
          counts.add(symbols, from, to);
          const { parameter } = chooser.choose(counts);
          sendParameter(parameter);
          const start = writer.position;
          family.encode(writer, symbols, from, to, parameter);
          bookWords(start);
        }
        ledger.close(writer);
      }),
    );
  }

  const parameter = given ?? integerTables(family, setup).parameter;
  let isDue = given === undefined && setup.policy === 'sent';
  return finishWith(
    new MessagePieces({
      begin(symbolCount) {
        begin(symbolCount);
        if (isDue && symbolCount > 0) {
          sendParameter(parameter);
          isDue = false;
        }
      },
      take(symbols, from, to) {
        const start = writer.position;
        family.encode(writer, symbols, from, to, parameter);
        bookWords(start);
      },
      end: () => ledger.close(writer),
    }),
  );
}
