import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Setup } from '../../src/coders/contract.ts';
import { expGolombFamily } from '../../src/coders/exp-golomb.ts';
import { golombFamily } from '../../src/coders/golomb.ts';
import { riceFamily } from '../../src/coders/rice.ts';
import { OperationTally } from '../../src/models/counting-tally.ts';
import { oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';

const base = { reset: 'message', lengths: 'known', align: 1 } as const;

function trained(text: string, train: SymbolSequence): Setup {
  const setup: Setup = { ...base, policy: 'shipped', alphabetSize: train.alphabetSize };
  const trainer = parseCandidate(text).create().trainer!(setup);
  trainer.push(train);
  return { ...setup, tables: trainer.finish() };
}

const one = (alphabetSize: number, symbols: readonly number[]) =>
  oneMessage(Uint8Array.from(symbols), alphabetSize);

describe('huffman', () => {
  // Counts 7, 3, 1, 1 and a half each: words of 1, 2, 3, 3 bits.
  const train = one(4, [0, 0, 0, 0, 0, 0, 0, 1, 1, 1, 2, 3]);

  it('takes the bytes of its layout', () => {
    const { encoder, decoder } = parseCandidate('huffman').create().costs!(
      trained('huffman', train),
      0,
      train,
    )!;
    // Length and word, 1 byte each, for 4 symbols. What code and RAM take is held to a compiler: test/export/sizes.test.ts.
    expect(encoder.flashBytes).toBe(8);
    // Three lengths with first word, number and place, 1 byte each; 4 symbols of 1 byte.
    expect(decoder.flashBytes).toBe(13);
  });

  it('takes the operations of its words', () => {
    const { encoder, decoder } = parseCandidate('huffman').create().operations!(
      one(4, [0, 1, 3]),
      trained('huffman', train),
    )!;
    expect(encoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: 6, branches: 3 });
    // Lengths walked 1, 2, 3: two reads and branches each; then place and symbol.
    expect(decoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: 12 + 6, branches: 12 });
    expect(decoder.worst).toEqual({ multiplies: 0, divides: 0, tableReads: 8, branches: 6 });
  });

  it('counts a lone symbol of the alphabet at the encoder only', () => {
    const { encoder, decoder } = parseCandidate('huffman').create().operations!(
      one(1, [0, 0]),
      trained('huffman', one(1, [0])),
    )!;
    expect(encoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: 2, branches: 2 });
    expect(decoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: 0, branches: 0 });
  });

  it('counts the second part of long words', () => {
    // Weights that double make words of 1, 2, … 27, 27 bits.
    const counts: number[] = [];
    for (let i = 0; i < 28; i++) counts.push(2 ** Math.max(0, 26 - i));
    const tables = { coder: 'huffman', counts: Float64Array.from(counts) };
    const setup: Setup = { ...base, policy: 'shipped', alphabetSize: 28, tables };
    const coder = parseCandidate('huffman:maxbits=32').create();
    const { encoder, decoder } = coder.operations!(one(28, [27]), setup)!;
    expect(encoder.total).toMatchObject({ tableReads: 3, branches: 2 });
    expect(decoder.total).toMatchObject({ tableReads: 2 * 27 + 2, branches: 2 * 27 });
  });

  it('walks as a decoder of its own does, over the bits that were written', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: 0, max: 15 }), { minLength: 1, maxLength: 200 }),
        fc.array(fc.integer({ min: 0, max: 15 }), { minLength: 1, maxLength: 200 }),
        (trainSymbols, testSymbols) => {
          const setup = trained('huffman', one(16, trainSymbols));
          const coder = parseCandidate('huffman').create();
          // The words, by coding each symbol alone.
          const words = new Map<string, number>();
          for (let symbol = 0; symbol < 16; symbol++) {
            const alone = coder.encoder(setup);
            alone.push(one(16, [symbol]));
            const { bytes, account } = alone.finish();
            const bits = [...bytes].map((b) => b.toString(2).padStart(8, '0')).join('');
            words.set(bits.slice(0, account.writtenBits), symbol);
          }
          const shortest = Math.min(...[...words.keys()].map((word) => word.length));
          const encoder = coder.encoder(setup);
          encoder.push(one(16, testSymbols));
          const { bytes, account } = encoder.finish();
          const text = [...bytes].map((b) => b.toString(2).padStart(8, '0')).join('');
          let at = 0;
          let probes = 0;
          let most = 0;
          const out: number[] = [];
          while (at < account.writtenBits) {
            let length = shortest;
            let own = 1;
            while (!words.has(text.slice(at, at + length))) {
              length++;
              own++;
            }
            out.push(words.get(text.slice(at, at + length))!);
            at += length;
            probes += own;
            most = Math.max(most, own);
          }
          expect(out).toEqual(testSymbols);
          const counted = coder.operations!(one(16, testSymbols), setup)!;
          expect(counted.decoder.total.branches).toBe(2 * probes);
          expect(counted.decoder.total.tableReads).toBe(2 * probes + 2 * out.length);
          expect(counted.decoder.worst.branches).toBe(2 * most);
          expect(counted).toEqual(coder.operations!(one(16, testSymbols), setup));
        },
      ),
      { numRuns: 60, seed: 5 },
    );
  });
});

describe('block-huffman', () => {
  it('takes the bytes of blocks, escape and both codes', () => {
    const text = 'block-huffman:n=2';
    const setup = trained(text, one(2, [0, 1, 0, 1]));
    const coder = parseCandidate(text).create();
    const { encoder, decoder } = coder.costs!(setup, 0, one(2, []))!;
    // One block of two symbols, as a number of 1 byte. Words of 1 bit: block and escape, and the two last symbols: at the
    // encoder 2 bytes each, at the decoder 3 for the one length; there the block and the escape stand in the list, 1 byte
    // each, and so do the last symbols.
    expect(encoder.flashBytes).toBe(1 + 4 + 4);
    expect(decoder.flashBytes).toBe(2 + 3 + 5);
  });

  it('takes the operations counted by hand: a block known, one escaped, a last symbol', () => {
    const text = 'block-huffman:n=2';
    const setup = trained(text, one(2, [0, 1, 0, 1]));
    const { encoder, decoder } = parseCandidate(text).create().operations!(
      one(2, [0, 1, 0, 0, 1]),
      setup,
    )!;
    // Encoder. 01: halving 1, two symbols compared 2 and 2, end and bound 2, compared again 2 and 2, word 2 and 1: 6 reads, 8
    // branches. 00: the second symbol differs, and it is asked which is less, twice: 6 and 10. The last: its word, 2 and 1.
    expect(encoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: 14, branches: 19 });
    expect(encoder.worst).toEqual({ multiplies: 0, divides: 0, tableReads: 6, branches: 10 });
    // Decoder. 01: a word of the shortest length 4 and 2, escape or not 1, two symbols 2: 6 and 3. 00: 4 and 3, and two symbols
    // held to the alphabet 2. The last: 4 and 2.
    expect(decoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: 14, branches: 10 });
    expect(decoder.worst).toEqual({ multiplies: 0, divides: 0, tableReads: 6, branches: 4 });
    expect(encoder.symbolCount).toBe(5);
  });

  it('walks as a decoder of its own does, over the bits that were written', () => {
    const symbols = fc.array(fc.integer({ min: 0, max: 3 }), { minLength: 1, maxLength: 120 });
    fc.assert(
      fc.property(symbols, symbols, fc.integer({ min: 1, max: 3 }), (train, test, n) => {
        const text = `block-huffman:n=${n}`;
        const setup = trained(text, one(4, train));
        const coder = parseCandidate(text).create();
        const blockCount = Math.floor(test.length / n);
        // Bits of each message of one block, by the coder itself: a word, and after an escape 2n raw bits.
        const bitsOf = (message: readonly number[]) => {
          const encoder = coder.encoder(setup);
          encoder.push(one(4, message));
          return encoder.finish().account.writtenBits;
        };
        const known = new Set<string>();
        for (let i = 0; i + n <= train.length; i += n) known.add(train.slice(i, i + n).join());
        const wordOf = (block: readonly number[]) =>
          bitsOf(block) - (known.has(block.join()) ? 0 : 2 * n);
        const all: number[][] = [[]];
        for (let i = 0; i < n; i++)
          all.push(...all.splice(0).flatMap((b) => [0, 1, 2, 3].map((s) => [...b, s])));
        const hasEscape = known.size < all.length;
        const shortest = Math.min(...all.map(wordOf));
        const tailWords = [0, 1, 2, 3].map((symbol) => (n === 1 ? 0 : bitsOf([symbol])));
        let reads = 0;
        let branches = 0;
        for (let i = 0; i < blockCount; i++) {
          const block = test.slice(i * n, i * n + n);
          const length = wordOf(block);
          const steps = length - shortest + 1;
          if (length > 0) reads += 2 * steps + 2;
          if (length > 0) branches += 2 * steps;
          if (hasEscape) branches += 1;
          if (known.has(block.join())) reads += n;
          else branches += n;
        }
        for (const symbol of test.slice(blockCount * n)) {
          const steps = tailWords[symbol] - Math.min(...tailWords) + 1;
          reads += 2 * steps + 2;
          branches += 2 * steps;
        }
        const { decoder } = coder.operations!(one(4, test), setup)!;
        expect(decoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: reads, branches });
        expect(decoder.symbolCount).toBe(test.length);
      }),
      { numRuns: 60, seed: 9 },
    );
  });
});

describe('fixed', () => {
  it('reads no table and decides at the decoder only', () => {
    const coder = parseCandidate('fixed').create();
    const setup: Setup = { ...base, policy: 'none', alphabetSize: 200 };
    const { encoder, decoder } = coder.operations!(one(200, [3, 4]), setup)!;
    expect(encoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: 0, branches: 0 });
    expect(decoder.total).toEqual({ multiplies: 0, divides: 0, tableReads: 0, branches: 2 });
    expect(coder.costs!(setup, 0, one(200, []))!.decoder.flashBytes).toBe(0);
  });
});

describe('integer codes', () => {
  /** Looks for the end of a run that the decoder really takes: 25 bits at once, and none by other reads. */
  class CountingReader extends BitReader {
    looks = 0;
    #reading = false;
    override peekBits(width: number): number {
      if (!this.#reading) this.looks++;
      return super.peekBits(width);
    }
    override readBits(width: number): number {
      this.#reading = true;
      const value = super.readBits(width);
      this.#reading = false;
      return value;
    }
  }

  /** Writes beyond one a word: a long word's runs of 32 zeros, and its rest. */
  class CountingWriter extends BitWriter {
    runs = 0;
    #inRun = false;
    override writeBits(value: number, width: number): void {
      if (this.#inRun) this.runs++;
      super.writeBits(value, width);
    }
    override writeRun(bit: 0 | 1, count: number): void {
      // The loop's last test.
      this.runs++;
      this.#inRun = true;
      super.writeRun(bit, count);
      this.#inRun = false;
    }
  }

  // Beside the run: branches of a word at encoder and decoder.
  it.each([
    [riceFamily, 1, () => 1],
    [expGolombFamily, 1, () => 1],
    [golombFamily, 2, (m: number) => (m > 1 ? 4 : 3)],
  ] as const)(
    '$name counts what coding really takes',
    (family, encoderBranches, decoderBranches) => {
      fc.assert(
        fc.property(
          fc.integer({ min: 0, max: 1000 }),
          fc.integer({ min: Math.max(1, family.least), max: 9 }),
          (symbol, parameter) => {
            const symbols = Uint16Array.of(symbol);
            const writer = new CountingWriter();
            family.encode(writer, symbols, 0, 1, parameter);
            const { runs } = writer;
            const reader = new CountingReader(writer.finish().bytes);
            family.decode(reader, new Uint16Array(1), 0, 1, parameter, 1001);
            const encoder = new OperationTally();
            const decoder = new OperationTally();
            family.countWord(symbol, parameter, encoder, decoder);
            expect(encoder.branches).toBe(encoderBranches + runs);
            expect(decoder.branches).toBe(decoderBranches(parameter) + 2 * reader.looks);
          },
        ),
        { seed: 7 },
      );
    },
  );

  it('golomb divides and multiplies once at each end, rice never', () => {
    const setup: Setup = { ...base, policy: 'none', alphabetSize: 256 };
    const counts = (text: string) =>
      parseCandidate(text).create().operations!(one(256, [9, 40, 2]), setup)!;
    for (const { total } of Object.values(counts('golomb:m=5')))
      expect(total).toMatchObject({ multiplies: 3, divides: 3, tableReads: 0 });
    for (const { total } of Object.values(counts('rice:k=2')))
      expect(total).toMatchObject({ multiplies: 0, divides: 0, tableReads: 0 });
  });

  it('adds the rule and the mean where the parameter adapts', () => {
    // 4 symbols: the mean starts with a sum of 2 · max(2, 0) = 4 and a count of 1, so 2 < 4 gives k = 1: two tests of the
    // rule, one of the mean. The word of 0: one branch at the encoder; one look (2) and the alphabet (1) at the decoder.
    const setup: Setup = { ...base, policy: 'learned', alphabetSize: 4 };
    const { encoder, decoder } = parseCandidate('rice').create().operations!(one(4, [0]), setup)!;
    expect(encoder.total.branches).toBe(2 + 1 + 1);
    expect(decoder.total.branches).toBe(2 + 1 + 3);
  });

  it('takes no flash, or the mean', () => {
    const coder = parseCandidate('rice').create();
    const of = (policy: Setup['policy']) =>
      coder.costs!({ ...base, policy, alphabetSize: 4 }, 0, one(4, [0, 1, 2]))!;
    expect(of('shipped').encoder.flashBytes).toBe(0);
    expect(of('learned').decoder).toMatchObject({ flashBytes: 8, ramBytes: 9 + 8 + 64 });
    // By symbol a count and a place in the list, 1 byte each.
    expect(of('sent').encoder).toMatchObject({ flashBytes: 0, ramBytes: 9 + 1 + 8 + 64 });
    expect(of('sent').decoder).toMatchObject({ flashBytes: 0, ramBytes: 9 + 1 + 64 });
  });
});
