import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Coder, CoderEntry, Setup } from '../../src/coders/contract.ts';
import { decoderSetup } from '../../src/coders/verify.ts';
import { listCells } from '../../src/harness/cells.ts';
import type { CorpusData } from '../../src/harness/corpus-data.ts';
import { runAll } from '../../src/harness/run-all.ts';
import { runCell } from '../../src/harness/run-cell.ts';
import { oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';

const pause = async (): Promise<void> => {};

function corpusOf(test: SymbolSequence, train?: SymbolSequence): CorpusData {
  return {
    name: 'a',
    key: 'a',
    sha256: '',
    symbolsAs: 'bytes',
    messagesAs: 'whole',
    lengths: 'sent',
    alphabetSize: test.alphabetSize,
    sourceBytes: test.symbols.length,
    test,
    ...(train === undefined ? {} : { train }),
    testFiles: [{ path: 'a', sha256: '', messageEnd: test.messageEnds.length }],
  };
}

const sequence = oneMessage(
  Uint8Array.from({ length: 500 }, (_, i) => (i * i) % 7),
  256,
);

/** A candidate whose decoder is wrong in one way. */
function broken(spoil: (coder: Coder) => Partial<Coder>): ReturnType<typeof parseCandidate> {
  const real = parseCandidate('fixed');
  const entry: CoderEntry = { declaration: real.declaration, create: () => real.create() };
  return { ...real, create: () => ({ ...entry.create({}), ...spoil(entry.create({})) }) };
}

async function verdict(candidate: ReturnType<typeof parseCandidate>): Promise<string> {
  const { cells } = listCells(['a'], [candidate], ['sent'], ['message']);
  const result = await runCell(cells[0], corpusOf(sequence), pause);
  return 'failure' in result ? result.failure : 'verified';
}

describe('a rate counts only if the decode gave back the input', () => {
  it('verifies an honest coder', async () => {
    expect(await verdict(broken(() => ({})))).toBe('verified');
  });

  it('fails a decoder that gives back another symbol, fewer symbols, or reads too little', async () => {
    const spoilt = (change: (symbols: Uint8Array) => Uint8Array, bits = 0) =>
      broken((real) => ({
        decoder: (setup, limits) => ({
          decode(input) {
            const decoded = real.decoder(setup, limits).decode(input);
            const symbols = change(Uint8Array.from(decoded.sequence.symbols));
            return {
              sequence: { ...decoded.sequence, symbols },
              bitsConsumed: decoded.bitsConsumed - bits,
            };
          },
        }),
      }));
    expect(await verdict(spoilt((s) => s.with(250, s[250] ^ 1)))).toMatch(/another symbol/);
    expect(await verdict(spoilt((s) => s.slice(1)))).toMatch(/another number of symbols/);
    expect(await verdict(spoilt((s) => s, 8))).toMatch(/exactly the carried bits/);
  });

  it('hands the decoder no sent tables', () => {
    const tables = { coder: 'x' };
    const setup: Setup = {
      policy: 'sent',
      alphabetSize: 2,
      reset: 'never',
      lengths: 'sent',
      align: 8,
      tables,
    };
    expect(decoderSetup(setup).tables).toBeUndefined();
    expect(decoderSetup({ ...setup, policy: 'shipped' }).tables).toBe(tables);
  });

  it('keeps a failed cell in the record, without a rate', async () => {
    const candidate = broken((real) => ({
      decoder: (setup, limits) => ({
        decode(input) {
          const decoded = real.decoder(setup, limits).decode(input);
          return { ...decoded, bitsConsumed: 0 };
        },
      }),
    }));
    const { record } = await runAll({
      title: '',
      corpora: [corpusOf(sequence)],
      candidates: [candidate],
      policies: ['sent'],
      resets: ['message'],
      align: 8,
      split: '',
    });
    expect(record.cells).toHaveLength(1);
    expect(record.cells[0].verified).toBe(false);
    expect(record.cells[0].rate).toBeUndefined();
    expect(record.cells[0].failure).toBeTruthy();
  });
});

describe('train and test never mix', () => {
  const symbols = fc.uint8Array({ minLength: 1, maxLength: 300 });

  it('shipped and primed cells depend on train only through the tables: another test part, the same tables', async () => {
    // The code of a test part with shipped tables must not change when other test messages stand beside it.
    await fc.assert(
      fc.asyncProperty(symbols, symbols, symbols, async (train, first, second) => {
        for (const text of ['huffman', 'arith:order=1', 'block-huffman:n=2', 'deflate-preset']) {
          const candidate = parseCandidate(text);
          for (const policy of candidate.declaration.policies.filter(
            (p) => p === 'shipped' || p === 'primed',
          )) {
            const { cells } = listCells(['a'], [candidate], [policy], ['message']);
            const bitsOf = async (test: SymbolSequence) => {
              const result = await runCell(cells[0], corpusOf(test, oneMessage(train, 256)), pause);
              if ('failure' in result) throw new Error(result.failure);
              return result.messageBits;
            };
            const alone = await bitsOf(oneMessage(first, 256));
            const both = new Uint8Array(first.length + second.length);
            both.set(first);
            both.set(second, first.length);
            const beside = await bitsOf({
              alphabetSize: 256,
              symbols: both,
              messageEnds: Uint32Array.of(first.length, both.length),
            });
            expect(beside[0], `${text} ${policy}`).toBe(alone[0]);
          }
        }
      }),
      { numRuns: 25 },
    );
  });
});
