import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Coder, Setup, TablePolicy } from '../../src/coders/contract.ts';
import type { Operations } from '../../src/models/counting-tally.ts';
import { oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';

const base = { reset: 'message', lengths: 'known', align: 1 } as const;
const coderOf = (text: string): Coder => parseCandidate(text).create();

const one = (alphabetSize: number, symbols: readonly number[]) =>
  oneMessage(Uint8Array.from(symbols), alphabetSize);

function messages(alphabetSize: number, all: readonly (readonly number[])[]): SymbolSequence {
  let end = 0;
  return {
    alphabetSize,
    symbols: Uint8Array.from(all.flat()),
    messageEnds: Uint32Array.from(all, (message) => (end += message.length)),
  };
}

function trained(text: string, train: SymbolSequence, policy: TablePolicy = 'shipped'): Setup {
  const setup: Setup = { ...base, policy, alphabetSize: train.alphabetSize };
  const trainer = coderOf(text).trainer!(setup);
  trainer.push(train);
  return { ...setup, tables: trainer.finish() };
}

const plus = (a: Operations, more: Partial<Operations>): Operations => ({
  multiplies: a.multiplies + (more.multiplies ?? 0),
  divides: a.divides + (more.divides ?? 0),
  tableReads: a.tableReads + (more.tableReads ?? 0),
  branches: a.branches + (more.branches ?? 0),
});

/** Counts 7, 3, 1, 1: words of 1, 2, 3, 3 bits. */
const train = one(4, [0, 0, 0, 0, 0, 0, 0, 1, 1, 1, 2, 3]);

describe('steps before a coder', () => {
  it('add their own operations to those of what they make', () => {
    const text = 'huffman:after=delta.zigzag';
    const setup = trained(text, train);
    const inner = { ...setup };
    // 0 1 3 less the one before is 0 1 2, in order of size 0 2 3 (modulo 4, 2 is −2).
    const plain = coderOf('huffman').operations!(one(4, [0, 2, 3]), inner)!;
    const { encoder, decoder } = coderOf(text).operations!(one(4, [0, 1, 3]), setup)!;
    // A branch a step and symbol, at either end.
    expect(encoder.total).toEqual(plus(plain.encoder.total, { branches: 6 }));
    expect(decoder.total).toEqual(plus(plain.decoder.total, { branches: 6 }));
    expect(decoder.worst).toEqual(plus(plain.decoder.worst, { branches: 2 }));
  });

  it('add the symbols they keep, and code', () => {
    const costs = (text: string) => coderOf(text).costs!(trained(text, train), 0, train)!;
    const plain = costs('huffman');
    const delta = costs('huffman:after=delta');
    expect(delta.encoder.ramBytes - plain.encoder.ramBytes).toBe(1);
    expect(delta.encoder.codeBytes).toBeGreaterThan(plain.encoder.codeBytes);
    expect(delta.encoder.flashBytes).toBe(costs('huffman:after=delta').encoder.flashBytes);
    // 24 symbols of a byte; slot and how many there are.
    expect(costs('huffman:after=lag24').decoder.ramBytes - plain.decoder.ramBytes).toBe(26);
    expect(costs('huffman:after=xor').decoder.ramBytes - plain.decoder.ramBytes).toBe(1);
    expect(costs('huffman:after=delta2').decoder.ramBytes - plain.decoder.ramBytes).toBe(2);
    expect(costs('huffman:after=zigzag').decoder.ramBytes).toBe(plain.decoder.ramBytes);
  });

  it('planes count for each symbol of the product, and hold what a step before them makes', () => {
    const text = 'huffman:after=bit-planes';
    const setup = trained(text, train);
    const { encoder, decoder } = coderOf(text).operations!(one(4, [0, 1, 3]), setup)!;
    // Six bits in words of a bit: 2 reads and 1 branch each; at the decoder 4 and 2, and each symbol is held to the alphabet.
    expect(encoder.symbolCount).toBe(3);
    expect(encoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: 12, branches: 6 });
    expect(decoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: 24, branches: 15 });
    expect(decoder.worst).toEqual({ multiplies: 0, divides: 0, tableReads: 8, branches: 5 });
    const alone = coderOf(text).costs!(setup, 0, train)!;
    const after = coderOf('huffman:after=delta.bit-planes').costs!(setup, 0, train)!;
    expect(after.encoder.ramBytes - alone.encoder.ramBytes).toBe(1 + 12);
    expect(after.decoder.ramBytes - alone.decoder.ramBytes).toBe(1);
  });

  it.each(['delta', 'delta2', 'lag3', 'xor', 'xor2', 'zigzag', 'bit-planes', 'zigzag.delta'])(
    '%s tells',
    (chain) => {
      const text = `rice:k=1,after=${chain}`;
      const setup: Setup = { ...base, policy: 'none', alphabetSize: 4 };
      expect(coderOf(text).operations!(train, setup)!.encoder.symbolCount).toBe(12);
      expect(coderOf(text).costs!(setup, 0, train)).toBeDefined();
    },
  );
});

describe('stored=on', () => {
  // 3 3: six bits in words, four raw. 0 0 0: three, and six raw.
  const test = messages(4, [
    [3, 3],
    [0, 0, 0],
  ]);
  const setup = trained('huffman', train);

  it('codes every message at the encoder, and reads at the decoder only what stayed coded', () => {
    const plain = coderOf('huffman');
    const { encoder, decoder } = coderOf('huffman:stored=on').operations!(test, setup)!;
    expect(encoder.total).toEqual(
      plus(plain.operations!(test, setup)!.encoder.total, { branches: 2 }),
    );
    const coded = plain.operations!(one(4, [0, 0, 0]), setup)!.decoder;
    // Two selectors, two raw symbols held to the alphabet.
    expect(decoder.total).toEqual(plus(coded.total, { branches: 4 }));
    expect(decoder.symbolCount).toBe(5);
    // A coded symbol 2, and the selector; a raw one 1, and the selector.
    expect(decoder.worst.branches).toBe(3);
  });

  it('holds the longest message as it was tried', () => {
    const own = coderOf('huffman').costs!(setup, 100, test)!;
    const { encoder, decoder } = coderOf('huffman:stored=on').costs!(setup, 100, test)!;
    expect(encoder.ramBytes - own.encoder.ramBytes).toBe(1);
    expect(decoder.ramBytes).toBe(own.decoder.ramBytes);
    expect(encoder.flashBytes).toBe(own.encoder.flashBytes);
    // An arithmetic coder's own buffer is that one: carried bytes do not come on top.
    const arith = trained('arith:order=0', train);
    const costs = (text: string, longest: number) => coderOf(text).costs!(arith, longest, test)!;
    expect(costs('arith:order=0,stored=on', 100)).toEqual(costs('arith:order=0,stored=on', 0));
  });

  it('is silent for coders that are', () => {
    const none: Setup = { ...base, policy: 'none', alphabetSize: 256 };
    expect(coderOf('deflate:stored=on').costs!(none, 0, one(256, [1]))).toBeUndefined();
    expect(coderOf('deflate:stored=on').operations!(one(256, [1]), none)).toBeUndefined();
  });
});

describe('tables in a set', () => {
  const all = messages(4, [
    [0, 0, 0, 0, 1, 0, 0, 0],
    [3, 3, 3, 3, 2, 3, 3, 3],
    [0, 0, 0, 1, 0, 0, 0, 0],
    [3, 3, 2, 3, 3, 3, 3, 3],
  ]);

  it('of one table take what the coder takes', () => {
    const setup = trained('huffman:tables_in_set=1', all);
    const plain = trained('huffman', all);
    const set = coderOf('huffman:tables_in_set=1');
    const coder = coderOf('huffman');
    expect(set.operations!(all, setup)).toEqual(coder.operations!(all, plain));
    expect(set.costs!(setup, 0, all)).toEqual(coder.costs!(plain, 0, all));
  });

  it('of two take the flash of both; the encoder tries both, the decoder reads with one', () => {
    const text = 'huffman:tables_in_set=2';
    const setup = trained(text, all);
    const { sets } = setup.tables as unknown as { sets: NonNullable<Setup['tables']>[] };
    const coder = coderOf('huffman');
    const setups = sets.map((tables) => ({ ...setup, tables }));
    const { encoder, decoder } = coderOf(text).operations!(all, setup)!;
    const { encoder: flashEncoder, decoder: flashDecoder } = coderOf(text).costs!(setup, 0, all)!;
    const own = setups.map((each) => coder.costs!(each, 0, all)!);
    expect(flashEncoder.flashBytes).toBe(own[0].encoder.flashBytes + own[1].encoder.flashBytes);
    expect(flashDecoder.flashBytes).toBe(own[0].decoder.flashBytes + own[1].decoder.flashBytes);
    // Each message by hand: its bits under either table tell whose it is.
    let reads = 0;
    let branches = 0;
    let tried = 0;
    for (let i = 0; i < 4; i++) {
      const message = one(4, [...all.symbols.subarray(8 * i, 8 * i + 8)]);
      const bits = setups.map((each) => {
        const alone = coder.encoder(each);
        alone.push(message);
        return alone.finish().account.writtenBits;
      });
      const counts = setups.map((each) => coder.operations!(message, each)!);
      const owner = bits[1] < bits[0] ? 1 : 0;
      reads += counts[owner].decoder.total.tableReads;
      branches += counts[owner].decoder.total.branches + 1;
      tried += counts[0].encoder.total.tableReads + counts[1].encoder.total.tableReads;
      tried += counts[owner].encoder.total.tableReads;
    }
    expect(decoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: reads, branches });
    expect(encoder.total.tableReads).toBe(tried);
    // Three words a symbol, and two comparisons a message.
    expect(encoder.total.branches).toBe(3 * 32 + 2 * 4);
    expect(encoder.symbolCount).toBe(32);
  });
});

describe('sent tables', () => {
  const sent = (alphabetSize: number): Setup => ({ ...base, policy: 'sent', alphabetSize });
  const test = messages(4, [[0, 0, 1], [], [1]]);

  it('huffman takes the words of each message’s own table', () => {
    const { encoder, decoder } = coderOf('huffman').operations!(test, sent(4))!;
    // Two words of a bit, then a lone symbol's empty word: 2 reads and 1 branch thrice, 1 and 1.
    expect(encoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: 7, branches: 4 });
    expect(decoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: 12, branches: 6 });
  });

  it('huffman holds counts, fit and words of the larger table', () => {
    const { encoder, decoder } = coderOf('huffman').costs!(sent(4), 0, test)!;
    // State 9; by symbol a count 1 and length and word 2; two symbols seen 1; two words: weights 2, places 4, depth 1. Frames: word
    // 1, fit 2, a set of two by halves 2.
    expect(encoder).toMatchObject({ flashBytes: 0, ramBytes: 9 + 4 * 3 + 2 + 2 * 7 + 5 * 32 });
    // State 9; one length 3 and two symbols; two words: length 1, places 2.
    expect(decoder).toMatchObject({ flashBytes: 0, ramBytes: 9 + 3 + 2 + 2 * 3 + 5 * 32 });
  });

  it('arith takes what a static model takes, tables in RAM', () => {
    const coder = coderOf('arith:order=0');
    const { encoder, decoder } = coder.operations!(one(2, [0, 1]), sent(2))!;
    // As shipped tables that know both symbols and nothing else.
    const shipped = trained('arith:order=0', one(2, [0, 1]));
    const same = coder.operations!(one(2, [0, 1]), shipped)!;
    expect({ encoder, decoder }).toEqual(same);
    const { decoder: cost } = coder.costs!(sent(2), 0, one(2, [0, 1]))!;
    // Static: 2 places, one context with unseen 2, entries 2 · (1 + 2). Strings: the empty one, the two, start: parent 1, symbol 1,
    // count 1; slots for 3: 8; lists 2 · (4 + 2); models 4 620; a length a symbol 2.
    expect(cost.flashBytes).toBe(0);
    // Stage 20, where it stands 1, five frames.
    expect(cost.ramBytes).toBe(10 + 12 + 8 + 12 + 4620 + 2 + 20 + 1 + 160);
  });

  it('an integer code takes the words of the parameter that suits each message', () => {
    const coder = coderOf('rice');
    const sequence = messages(64, [
      [0, 0, 0],
      [40, 50, 60],
    ]);
    const parts = [
      [0, [0, 0, 0]],
      [5, [40, 50, 60]],
    ] as const;
    const words = parts.map(([k, symbols]) =>
      coderOf(`rice:k=${k}`).operations!(one(64, symbols), { ...sent(64), policy: 'none' }),
    );
    const { encoder, decoder } = coder.operations!(sequence, sent(64))!;
    expect(encoder.total.branches).toBe(
      words[0]!.encoder.total.branches + words[1]!.encoder.total.branches,
    );
    expect(decoder.total.branches).toBe(
      words[0]!.decoder.total.branches + words[1]!.decoder.total.branches,
    );
  });

  it('are the same for the unit as for one message that holds it', () => {
    const symbols = fc.array(fc.integer({ min: 0, max: 3 }), { minLength: 1, maxLength: 80 });
    fc.assert(
      fc.property(
        symbols,
        fc.constantFrom('huffman', 'block-huffman:n=2', 'arith:order=1', 'rice', 'golomb'),
        (own, text) => {
          const unit = one(4, own);
          const coder = coderOf(text);
          const never: Setup = { ...sent(4), reset: 'never' };
          const trainer = coder.trainer!(never);
          trainer.push(unit);
          const setup = { ...never, tables: trainer.finish() };
          expect(coder.operations!(unit, setup)).toEqual(coder.operations!(unit, sent(4)));
          expect(coder.costs!(setup, 7, unit)).toEqual(coder.costs!(sent(4), 7, unit));
        },
      ),
      { numRuns: 80, seed: 4 },
    );
  });
});
