import { BitWriter } from '../bits/bit-writer.ts';
import { PrefixEncoder } from '../stages/prefix-encoder.ts';
import { PrefixMessageEncoder } from '../stages/prefix-message-encoder.ts';
import type { PrefixTable } from '../stages/prefix-table.ts';
import type { Encoder, Setup } from './contract.ts';
import { SymbolCounts } from './huffman-counts.ts';
import { HuffmanFit } from './huffman-tables.ts';
import { writeSymbolCount } from './message-frame.ts';
import { MessageLedger } from './message-ledger.ts';
import { MessagePieces, wholeMessages } from './message-pieces.ts';

/** Fewer messages are not worth a run of the kernel for many. */
const MANY = 4;

/** One code for the whole unit; a `table` is sent in the first message that has symbols. */
export function streamEncoder(
  setup: Setup,
  words: PrefixEncoder,
  table: PrefixTable | undefined,
  maxBits: number,
): Encoder {
  const writer = new BitWriter(1024, setup.sink);
  const ledger = new MessageLedger(setup.align);
  const kernel = new PrefixMessageEncoder(
    words,
    setup.align,
    setup.lengths === 'known' ? 0 : (setup.unitSymbols ?? 1),
  );
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
      if (writer.shouldDrain) writer.drain();
    },
    end() {
      ledger.close(writer);
    },
    many(symbols, messageEnds, index, from) {
      if (unsent !== undefined || messageEnds.length - index < MANY) return index;
      words.expect(messageEnds[messageEnds.length - 1] - from);
      const ends = ledger.roomForEnds(messageEnds.length - index);
      let done = index;
      let at = from;
      for (let before = -1; before < done; ) {
        before = done;
        done = kernel.run(writer, symbols, messageEnds, done, at, ends, ledger.messageCount);
        ledger.payloadBits += kernel.writtenBits;
        ledger.closeMany(writer, done - before, kernel);
        if (done > before) at = messageEnds[done - 1];
      }
      return done;
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
  const writer = new BitWriter(1024, setup.sink);
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
