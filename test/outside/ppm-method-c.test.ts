/**
 * Method C after `abracadabra` at order 2: A. Moffat 1990 for the escape, J. G. Cleary, W. J. Teahan 1997 for the table.
 * Exclusion as published: excluded symbols leave the counts, the escape keeps its weight q.
 *
 * The published table counts every symbol in all orders; this model counts by update exclusion. After the eleven letters
 * both know the same of the contexts `ra`, `a` and ∅'s symbols; where counts differ, the case is left to the second model
 * of test/models, and the table is checked through a static table of the same counts.
 */
import { describe, expect, it } from 'vitest';
import { BackOffModel } from '../../src/models/back-off-model.ts';
import { PairTree } from '../../src/models/pair-tree.ts';
import { StaticModel } from '../../src/models/static-model.ts';
import { compileTable } from '../../src/models/static-table.ts';
import { PlainBackOff } from '../models/plain-back-off.ts';
import { RecordedIntervals } from '../models/recorded-intervals.ts';
import vectors from './vectors/ppm-method-c.json' with { type: 'json' };

const text = Uint8Array.from(Buffer.from('abracadabra'));

/** A fraction in lowest terms, so that 3/6 and 1/2 are one. */
function lowest(ratio: string): string {
  let [a, b] = ratio.split('/').map(Number);
  const whole = [a, b];
  while (b !== 0) [a, b] = [b, a % b];
  return `${whole[0] / a}/${whole[1] / a}`;
}

interface Next {
  kind: string;
  symbol?: string;
  steps?: string[];
  bits?: number;
}

describe('the escape of method C in static tables', () => {
  it.each(Object.entries(vectors.cases[0].method_C!))('context "%s"', (context, expected) => {
    const pairs = new PairTree(256, context.length);
    pairs.count(text, 0, text.length);
    const table = compileTable(pairs.tree, context.length, 'escape', 'exact');
    for (const [name, ratio] of Object.entries(expected)) {
      // A letter that the text never has takes the escape.
      const symbols = Uint8Array.from(Buffer.from(context + (name === 'escape' ? 'z' : name)));
      const model = new StaticModel(table);
      model.encode(symbols, 0, context.length, { put() {} });
      const sink = new RecordedIntervals();
      model.encode(symbols, context.length, symbols.length, sink);
      expect(lowest(sink.ratios[0])).toBe(lowest(ratio));
    }
  });
});

describe('exclusion with q kept', () => {
  const next = (vectors.cases as Next[]).filter((c) => c.kind === 'next_symbol');
  it.each(next.map((c) => [c.symbol!, c.steps!, c.bits!]))(
    'the letter %s, where every order counts',
    (symbol, steps, bits) => {
      // The published table's counts, put into the plain model; its coding rule is the one under test.
      const plain = new PlainBackOff(256, 2, 2 ** 22);
      for (let order = 0; order <= 2; order++) {
        plain.history = [256, 256];
        for (const letter of text) {
          const counts = plain.countsOf(order);
          counts.set(letter, (counts.get(letter) ?? 0) + 1);
          plain.history = [plain.history[1], letter];
        }
      }
      const got = plain.code(symbol.charCodeAt(0));
      expect(got.map(lowest)).toEqual(steps.map(lowest));
      const total = got.reduce((sum, ratio) => {
        const [frequency, whole] = ratio.split('/').map(Number);
        return sum + Math.log2(whole / frequency);
      }, 0);
      expect(total).toBeCloseTo(bits, 10);
    },
  );

  it('is what the fast model does, counts by update exclusion apart', () => {
    for (const letter of 'cdtrbaz') {
      const model = new BackOffModel(256, 2, 2 ** 22);
      model.encode(text, 0, text.length, { put() {} });
      const sink = new RecordedIntervals();
      model.encode(Uint8Array.of(letter.charCodeAt(0)), 0, 1, sink);
      const plain = new PlainBackOff(256, 2, 2 ** 22);
      for (const symbol of text) plain.code(symbol);
      expect(sink.ratios).toEqual(plain.code(letter.charCodeAt(0)));
    }
  });
});
