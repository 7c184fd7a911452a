import { BitWriter } from '../bits/bit-writer.ts';
import { PrefixEncoder } from '../stages/prefix-encoder.ts';
import type { PrefixTable } from '../stages/prefix-table.ts';
import type { Encoder, Setup } from './contract.ts';
import { SymbolCounts } from './huffman-counts.ts';
import { HuffmanFit } from './huffman-tables.ts';
import { writeSymbolCount } from './message-frame.ts';
import { MessageLedger } from './message-ledger.ts';
import { MessagePieces, wholeMessages } from './message-pieces.ts';

/** One code for the whole unit; a `table` is sent in the first message that has symbols. */
export function streamEncoder(
  setup: Setup,
  words: PrefixEncoder,
  table: PrefixTable | undefined,
  maxBits: number,
): Encoder {
  const writer = new BitWriter();
  const ledger = new MessageLedger(setup.align);
  let unsent = table;
  const pieces = new MessagePieces({
    begin(symbolCount) {
      ledger.framingBits += writeSymbolCount(writer, setup, symbolCount);
      if (unsent !== undefined && symbolCount > 0) {
        ledger.tableBits += unsent.write(writer, setup.alphabetSize, maxBits);
        unsent = undefined;
      }
    },
    take(symbols, from, to) {
      const bits = words.encode(writer, symbols, from, to);
      ledger.writtenBits += bits;
      ledger.payloadBits += bits;
    },
    end() {
      ledger.close(writer);
    },
  });
  return {
    push: (chunk) => pieces.push(chunk),
    finish: () => {
      pieces.finish();
      return ledger.finish(writer);
    },
  };
}

/** Fits a code to each message and sends it there. */
export function messageEncoder(setup: Setup, maxBits: number): Encoder {
  const writer = new BitWriter();
  const ledger = new MessageLedger(setup.align);
  const counts = new SymbolCounts(setup.alphabetSize);
  const fit = new HuffmanFit(maxBits);
  const words = new PrefixEncoder(setup.alphabetSize);
  const pieces = wholeMessages((symbols, from, to) => {
    ledger.framingBits += writeSymbolCount(writer, setup, to - from);
    if (to > from) {
      counts.clear();
      counts.add(symbols, from, to);
      fit.fitSeen(counts);
      const { table } = fit;
      ledger.tableBits += table.write(writer, setup.alphabetSize, maxBits);
      words.setWords(table.symbols, table.lengths, table.count);
      const bits = words.encode(writer, symbols, from, to);
      ledger.writtenBits += bits;
      ledger.payloadBits += bits;
    }
    ledger.close(writer);
  });
  return {
    push: (chunk) => pieces.push(chunk),
    finish: () => {
      pieces.finish();
      return ledger.finish(writer);
    },
  };
}
