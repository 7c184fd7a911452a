import { describe, expect, it } from 'vitest';
import type { CorpusData } from '../../src/harness/corpus-data.ts';
import { type EntropyReportOptions, entropyReport } from '../../src/harness/entropy-report.ts';
import { runRecordSchema } from '../../src/harness/run-record.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';

const usual: EntropyReportOptions = { upto: 2, rough: false, all: false, difference: 0.01 };

const corpusOf = (test: SymbolSequence, train?: SymbolSequence): CorpusData => ({
  name: 'trackers',
  key: 'trackers',
  sha256: '00',
  symbolsAs: 'bytes',
  messagesAs: 'whole',
  lengths: 'known',
  alphabetSize: test.alphabetSize,
  sourceBytes: test.symbols.length,
  test,
  ...(train === undefined ? {} : { train }),
  testFiles: [{ path: 'a', sha256: '00', messageEnd: test.messageEnds.length }],
});

function chain(seed: string, n: number, stay: (i: number) => number): SymbolSequence {
  const generator = new SeededGenerator(seed);
  let state = 0;
  const symbols = Uint8Array.from({ length: n }, (_, i) => {
    if (generator.real() >= stay(i)) state = (state + generator.integer(1, 3)) % 4;
    return state;
  });
  return oneMessage(symbols, 4);
}

const report = async (corpus: CorpusData, options: Partial<EntropyReportOptions> = {}) => {
  const { entropy } = await entropyReport([corpus], { ...usual, ...options });
  for (const entry of entropy) {
    expect(runRecordSchema.shape.entropy.element.safeParse(entry).error?.issues).toBeUndefined();
  }
  return entropy;
};

describe('entropyReport', () => {
  it('runs every ceiling on a chain, and each lies at its rate or above', async () => {
    const [entry] = await report(corpusOf(chain('chain', 20_000, () => 0.9)));
    // Stay with 0.9, else one of three others: the closed form.
    const rate = -0.9 * Math.log2(0.9) - 0.1 * Math.log2(0.1 / 3);
    const names = entry.ceilings!.map((c) => c.name);
    expect(names).toEqual(expect.arrayContaining(['fixed', 'arith:order=1', 'ctw:depth=16']));
    const of = (name: string) => entry.ceilings!.find((c) => c.name === name)!.rate;
    // The draw varies by some 0.011 bits; learning 12 numbers costs below 0.01.
    for (const name of ['arith:order=1', 'ctw:depth=16']) {
      expect(Math.abs(of(name) - rate)).toBeLessThan(4 * 0.011 + 0.01);
    }
    expect(entry.floor.high).toBe(Math.min(...entry.ceilings!.map((c) => c.rate)));
    expect(entry.drift!.change).toBeUndefined();
    expect(entry.resolution!.order).toBe(1);
    expect(entry.training_sizes!.order).toBe(1);
    expect(entry.block_view).toBeUndefined();
    const [all] = await report(corpusOf(chain('chain', 20_000, () => 0.9)), { all: true });
    expect(all.block_view!.map((b) => b.n)).toEqual([1, 2, 3, 4, 5, 6, 7, 8]);
    for (const { n, plug_in, huffman } of all.block_view!) {
      expect(huffman).toBeGreaterThanOrEqual(plug_in - 1e-9);
      expect(huffman).toBeLessThan(plug_in + 1 / n);
    }
    expect(all.orders[0].estimates!.nsb).toBeGreaterThan(1.9);
  });

  it('stops on noise after two orders that need more than equal lengths, and lists the rest', async () => {
    const generator = new SeededGenerator('noise');
    const noise = Uint8Array.from({ length: 30_000 }, () => generator.integer(0, 255));
    const [entry] = await report(corpusOf(oneMessage(noise, 256)));
    expect(entry.ceilings!.map((c) => c.name)).toEqual(['fixed', 'arith:order=0', 'arith:order=1']);
    expect(entry.no_ceilings!.map((c) => c.name)).toEqual([
      'arith:order=2',
      'arith:order=3',
      'arith:order=4',
      'ctw:depth=6',
    ]);
    expect(entry.floor.high).toBe(8);
  });

  it('runs no coder when rough, and says nothing of what would need one', async () => {
    const [entry] = await report(corpusOf(chain('rough', 5_000, () => 0.9)), { rough: true });
    expect(entry.ceilings).toEqual([{ name: 'fixed', rate: 2 }]);
    expect(entry.training_sizes).toBeUndefined();
    expect(entry.train_to_test).toBeUndefined();
    expect(entry.orders.every((order) => order.useful === undefined)).toBe(true);
    expect(entry.drift!.tests).toHaveLength(2);
  });

  it('trusts no interval where it finds a switch', async () => {
    const switching = chain('switch', 40_000, (i) => (i < 20_000 ? 0.9 : 0.4));
    const [entry] = await report(corpusOf(switching), { rough: true });
    expect(entry.drift!.change!.at_symbol).toBeGreaterThan(19_000);
    expect(entry.drift!.change!.at_symbol).toBeLessThan(21_000);
    expect(entry.orders.every((order) => order.interval_trusted === false)).toBe(true);
  });

  it('holds what trained against what is coded where a corpus has both', async () => {
    const train = chain('train', 20_000, () => 0.5);
    const test = chain('test', 20_000, () => 0.9);
    const [entry] = await report(corpusOf(test, train));
    // Each pair of rates in the closed form: D(0.9, 0.1/3 … ‖ 0.5, 0.5/3 …).
    const divergence = 0.9 * Math.log2(0.9 / 0.5) + 0.1 * Math.log2(0.1 / 0.5);
    const { excess, standard_error: error } = entry.train_to_test!;
    expect(Math.abs(excess - divergence)).toBeLessThan(4 * error + 0.02);
  });

  it('samples what is too long, and says so', async () => {
    const long = { alphabetSize: 2, symbols: new Uint8Array(2 ** 25 + 1) };
    const whole = { ...long, messageEnds: Uint32Array.of(long.symbols.length) };
    const [entry] = await report(corpusOf(whole), { upto: 0 });
    expect(entry.sampled_symbols).toBe(2 ** 25);
    expect(entry.orders[0].interval_unit).toBe('64 pieces');
    expect(entry.ceilings).toEqual([{ name: 'fixed', rate: 1 }]);
    expect(entry.orders[0].corrected).toBe(0);
  });

  it('has two entries where there are several messages, and one survey', async () => {
    const symbols = chain('two', 6_000, () => 0.8).symbols;
    const entries = await report(
      corpusOf({ alphabetSize: 4, symbols, messageEnds: Uint32Array.of(3_000, 6_000) }),
    );
    expect(entries.map((e) => e.contexts)).toEqual(['message', 'running']);
    expect(entries.map((e) => e.drift !== undefined)).toEqual([true, false]);
    expect(entries[1].ceilings).toEqual(entries[0].ceilings);
  });

  it('has no entry for no symbols', async () => {
    expect(await report(corpusOf(oneMessage(new Uint8Array(0), 2)))).toEqual([]);
  });

  it.each([
    ['one symbol', oneMessage(Uint8Array.of(3), 256)],
    [
      'two symbols in two messages',
      { ...oneMessage(Uint8Array.of(1, 1), 2), messageEnds: Uint32Array.of(1, 2) },
    ],
    ['all equal', oneMessage(new Uint8Array(3000).fill(7), 256)],
    [
      'all different',
      oneMessage(
        Uint16Array.from({ length: 3000 }, (_, i) => i),
        65_536,
      ),
    ],
    ['an alphabet of one', oneMessage(new Uint8Array(2000), 1)],
  ])('has figures for %s', async (_, sequence) => {
    for (const entry of await report(corpusOf(sequence), { all: true })) {
      expect(entry.floor.low).toBeLessThanOrEqual(entry.floor.point);
      expect(entry.floor.point).toBeLessThanOrEqual(entry.floor.high);
      expect(JSON.stringify(entry)).not.toMatch(/null/);
    }
  });
});
