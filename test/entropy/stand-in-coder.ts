import type { Coder, Setup, Tables } from '../../src/coders/contract.ts';
import { fixed } from '../../src/coders/fixed.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';

interface CountTables extends Tables {
  readonly counts: ReadonlyMap<string, number>;
}

/**
 * A plain coder for tests of what is built on coders: it writes equal-length codes under any policy, and prices `shipped`
 * by order-k counts of the training part with one added to each symbol, contexts starting anew at each message.
 */
export function addOneCoder(order: number): Coder {
  const plain = fixed.create({});
  return {
    ...plain,
    trainer() {
      const counts = new Map<string, number>();
      return {
        push: (chunk) =>
          eachSymbol(chunk, order, (context, symbol) => {
            for (const key of [context, `${context}>${symbol}`]) {
              counts.set(key, (counts.get(key) ?? 0) + 1);
            }
          }),
        finish: (): CountTables => ({ coder: 'add-one', counts }),
      };
    },
    price(sequence: SymbolSequence, setup: Setup) {
      if (setup.tables === undefined) return plain.price!(sequence, setup);
      const { counts } = setup.tables as CountTables;
      const messageIdealBits = new Float64Array(sequence.messageEnds.length);
      let idealBits = 0;
      eachSymbol(sequence, order, (context, symbol, message) => {
        const seen = (counts.get(`${context}>${symbol}`) ?? 0) + 1;
        const bits = Math.log2(((counts.get(context) ?? 0) + setup.alphabetSize) / seen);
        messageIdealBits[message] += bits;
        idealBits += bits;
      });
      return { idealBits, messageIdealBits };
    },
  };
}

function eachSymbol(
  { symbols, messageEnds }: SymbolSequence,
  order: number,
  visit: (context: string, symbol: number, message: number) => void,
): void {
  let from = 0;
  messageEnds.forEach((to, message) => {
    for (let i = from; i < to; i++) {
      const before = symbols.slice(Math.max(from, i - order), i);
      visit(`${'_'.repeat(order - before.length)}${before.join()}`, symbols[i], message);
    }
    from = to;
  });
}
