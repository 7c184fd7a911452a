import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Setup, TablePolicy } from '../../src/coders/contract.ts';
import { costFigures } from '../../src/harness/cost-figures.ts';
import { oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';

const one = (alphabetSize: number, symbols: readonly number[]) =>
  oneMessage(Uint8Array.from(symbols), alphabetSize);

const setupFor = (
  alphabetSize: number,
  policy: TablePolicy = 'learned',
  more: Partial<Setup> = {},
): Setup => ({ policy, alphabetSize, reset: 'message', lengths: 'known', align: 8, ...more });

const operations = (text: string, sequence: SymbolSequence) =>
  parseCandidate(text).create().operations!(sequence, setupFor(sequence.alphabetSize))!;

describe('operations of adaptive models', () => {
  it('are those counted by hand at order 0: a new symbol, then the same', () => {
    const { encoder, decoder } = operations('arith:order=0', one(2, [0, 0]));
    // New. Reads of either: one level of a tree (encoder: seen below; decoder: the symbol of a rank), then counting: seen or not,
    // twice, one level of each tree, the count. Branches: anything seen, symbols left, seen or not twice, too large; the decoder's
    // search 1. The interval: 1 divide and 2 of the decoder, 2 multiplies, 2 branches.
    // Seen. Encoder: seen or not and its count 2 reads, counting 3; anything seen, the loop over excluded ones, all seen, this one
    // seen, certain, new or not, too large, the interval 2. Decoder: search 1, sum 1, count 1, counting 3; anything seen, two
    // loops, all seen, certain twice, target three times, the search 1, certain, new or not, too large, the interval 2.
    expect(encoder.total).toEqual({ multiplies: 4, divides: 2, tableReads: 6 + 5, branches: 16 });
    expect(decoder.total).toEqual({
      multiplies: 4,
      divides: 4,
      tableReads: 6 + 6,
      branches: 8 + 15,
    });
    expect(encoder.worst).toEqual({ multiplies: 2, divides: 1, tableReads: 6, branches: 9 });
  });

  it('are those counted by hand at order 1: besides, the context asked, added to and found', () => {
    const { encoder, decoder } = operations('arith:order=1', one(2, [0]));
    // As at order 0; the context's sum 1 and 1; two tests of the loop over longer contexts; adding 3 and 2, its sum and whether
    // it can be too large 1 and 1; the next context 1 and 1.
    expect(encoder.total).toEqual({ multiplies: 2, divides: 1, tableReads: 12, branches: 14 });
    expect(decoder.total).toEqual({ multiplies: 2, divides: 2, tableReads: 12, branches: 15 });
  });

  it('are those counted by hand of additive counts', () => {
    const { encoder, decoder } = operations(
      'arith:order=0,backoff=none,counts=add:3/7',
      one(2, [1]),
    );
    // Products by q of sum, count and lower end, by p of the symbol; after it once more by q: 5, and the interval 2. The decoder
    // weighs one level. Reads: the count, then counting as before 5; the decoder's search 1. Branches: new or not 2, too large 1;
    // the interval 2; the search 1.
    expect(encoder.total).toEqual({ multiplies: 7, divides: 1, tableReads: 6, branches: 5 });
    expect(decoder.total).toEqual({ multiplies: 8, divides: 2, tableReads: 7, branches: 6 });
    // With p and q powers of two no product is a multiply.
    const kt = operations('arith:order=0,backoff=none', one(2, [1]));
    expect(kt.encoder.total).toEqual({ multiplies: 2, divides: 1, tableReads: 6, branches: 5 });
  });

  it('of an alphabet of one symbol divide nothing', () => {
    for (const text of ['arith:order=0', 'arith:order=2', 'arith:order=1,backoff=none']) {
      const { encoder, decoder } = operations(text, one(1, [0, 0, 0]));
      expect(encoder.total.divides + decoder.total.divides).toBe(0);
      expect(encoder.symbolCount).toBe(3);
    }
  });

  it('start anew at each message under reset message only', () => {
    const text = 'arith:order=2';
    const symbols = [0, 1, 2, 0, 1, 2, 0, 1];
    const twice: SymbolSequence = {
      alphabetSize: 3,
      symbols: Uint8Array.from([...symbols, ...symbols]),
      messageEnds: Uint32Array.of(8, 16),
    };
    const coder = parseCandidate(text).create();
    const once = coder.operations!(one(3, symbols), setupFor(3))!;
    const each = coder.operations!(twice, setupFor(3))!;
    const on = coder.operations!(twice, setupFor(3, 'learned', { reset: 'never' }))!;
    expect(each.encoder.total.tableReads).toBe(2 * once.encoder.total.tableReads);
    expect(each.encoder.worst).toEqual(once.encoder.worst);
    expect(on.encoder.symbolCount).toBe(16);
    expect(on.encoder.total).not.toEqual(each.encoder.total);
  });
});

describe('bytes of adaptive models', () => {
  const costsOf = (text: string, sequence: SymbolSequence, setup = setupFor(2)) =>
    parseCandidate(text).create().costs!(setup, 10, sequence)!;

  it('order 0: the empty context', () => {
    const { encoder, decoder } = costsOf('arith:order=0', one(2, [0, 1]));
    // Sums to 2^13 + 1 in 2 bytes. By symbol a count and a byte, 6; two trees of two, 2 and 1 byte each, 6; sum and number of
    // symbols 3. Range coder 20, five frames 160.
    expect(decoder).toMatchObject({ flashBytes: 0, ramBytes: 15 + 20 + 160 });
    expect(encoder).toMatchObject({ flashBytes: 0, ramBytes: 15 + 20 + 160 + 10 });
  });

  it('order 1: contexts, the table that finds them, excluded symbols', () => {
    const { decoder } = costsOf('arith:order=1', one(2, [0, 1, 0]));
    // Contexts start, 0 and 1: parent 1, symbol 1, entry 1 + 2, sum 2. Table by symbol and start: 3. Excluded: 2 · (4 + 1).
    // Where it stands: two contexts and a symbol, 3. No context has two symbols.
    expect(decoder.ramBytes).toBe(3 * 7 + 3 + 10 + 3 + 15 + 20 + 160);
    // 0 is followed by 1 and by 0: a run of 4 words of 3 bytes, its place 1 byte in two free lists.
    const { decoder: withRun } = costsOf('arith:order=1', one(2, [0, 1, 0, 0]));
    expect(withRun.ramBytes - decoder.ramBytes).toBe(4 * 3 + 2);
  });

  it('halve_at bounds the width of counts', () => {
    const least = costsOf('arith:order=0,halve_at=16', one(2, [0, 1]));
    const most = costsOf('arith:order=0,halve_at=4194304', one(2, [0, 1]));
    // 1 or 4 bytes instead of 2 for two counts, two sums of a tree and their sum.
    expect(least.decoder.ramBytes).toBe(15 - 5 + 180);
    expect(most.decoder.ramBytes).toBe(15 + 10 + 180);
  });

  it('additive, order 1: no empty context, none excluded', () => {
    const { decoder } = costsOf('arith:order=1,backoff=none,halve_at=1000', one(2, [0, 1, 0]));
    expect(decoder.ramBytes).toBe(3 * 7 + 3 + 3 + 20 + 160);
  });

  it('primed: the trained state lies in flash too', () => {
    const coder = parseCandidate('arith:order=1').create();
    const setup = setupFor(2, 'primed');
    const trainer = coder.trainer!(setup);
    trainer.push(one(2, [0, 1, 0]));
    const costs = coder.costs!({ ...setup, tables: trainer.finish() }, 0, one(2, [0]))!;
    expect(costs.encoder.flashBytes).toBe(3 * 7 + 3 + 15);
    expect(costs.decoder.ramBytes).toBe(3 * 7 + 3 + 10 + 3 + 15 + 20 + 160);
  });

  it('over units the most of any', () => {
    const coder = parseCandidate('arith:order=1').create();
    const unit = (symbols: readonly number[]) => {
      const messages = one(256, symbols);
      const setup = setupFor(256);
      const encoder = coder.encoder(setup);
      encoder.push(messages);
      return { messages, setup, coded: encoder.finish() };
    };
    const long = unit([1, 2, 3, 4, 5, 6]);
    const short = unit([1]);
    const alone = costFigures(coder, [long], 0).costs;
    expect(costFigures(coder, [long, short], 0).costs).toEqual(alone);
    expect(costFigures(coder, [short, long], 0).costs).toEqual(alone);
  });
});
