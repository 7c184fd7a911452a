import { existsSync, mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { CorpusSpec } from '../../src/corpus/corpus.ts';
import type { SplitRule } from '../../src/corpus/decide-split.ts';
import { CorruptStreamError } from '../../src/errors/errors.ts';
import { type Cell, listCells } from '../../src/harness/cells.ts';
import { loadCorpusData } from '../../src/harness/load-corpus-data.ts';
import { runAll } from '../../src/harness/run-all.ts';
import { type CellBits, runCell } from '../../src/harness/run-cell.ts';
import { runRecordSchema } from '../../src/harness/run-record.ts';
import { runStreamedCell } from '../../src/harness/stream-cell.ts';
import { StreamComparison } from '../../src/harness/stream-compare.ts';
import { openStreamedData } from '../../src/harness/stream-data.ts';
import { CodedFile } from '../../src/harness/stream-file.ts';
import { boundedRequest } from '../../src/harness/stream-request.ts';
import { runStreamed } from '../../src/harness/stream-run.ts';

let folder: string;
let coded: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-pieces-'));
  coded = mkdtempSync(join(tmpdir(), 'bitassay-pieces-coded-'));
});
afterAll(() => {
  rmSync(folder, { recursive: true });
  rmSync(coded, { recursive: true });
});

const HALF: SplitRule = { by: 'message', order: 'in_time', train: 0.5 };
const CANDIDATES = ['huffman', 'arith:order=0', 'arith:order=1', 'arith:order=2'];

const specOf = (files: string[], more: Partial<CorpusSpec> = {}): CorpusSpec => ({
  name: 'uplink',
  files,
  symbols: 'bytes',
  messages: 'whole',
  ...more,
});

function cellsFor(candidates: readonly string[], policies: readonly Cell['policy'][]): Cell[] {
  const parsed = candidates.map(parseCandidate);
  const resets: Cell['reset'][] = ['message', 'file', 'never'];
  return [...listCells(['uplink'], parsed, policies, resets).cells];
}

const pause = async () => {};

function bitsOf(result: Awaited<ReturnType<typeof runCell>>): CellBits {
  if ('failure' in result) throw new Error(result.failure);
  return result;
}

/** Readings of a tracker, the same each time: a wandering value and a counter, now and then a burst. */
function readings(length: number, seed: number): Uint8Array {
  const bytes = new Uint8Array(length);
  let state = seed + 1;
  let value = 60;
  for (let i = 0; i < length; i++) {
    state = (Math.imul(state, 1103515245) + 12345) >>> 0;
    value = (value + ((state >>> 16) % 5) - 2) & 0x7f;
    bytes[i] = i % 9 === 8 ? 10 : value;
  }
  return bytes;
}

describe('a cell that is run in pieces', () => {
  test('comes to the bytes, the account and the prices of the whole', async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.array(fc.integer({ min: 1, max: 3000 }), { minLength: 1, maxLength: 3 }),
        fc.constantFrom(
          { messages: 'whole' },
          { messages: 'every=100' },
          { messages: 'lines' },
          { messages: 'every=64', symbols: 'nibbles' },
        ),
        fc.constantFrom<CorpusSpec['lengths']>(undefined, 'link', 'known', 'sent'),
        fc.constantFrom(2, 16, 50, 512, 4096),
        fc.boolean(),
        fc.nat(2 ** 20),
        async (sizes, rule, lengths, chunkBytes, splits, seed) => {
          const names = sizes.map((size, i) => {
            writeFileSync(join(folder, `p${i}.bin`), readings(size, seed + i));
            return `p${i}.bin`;
          });
          const spec = specOf(names, { ...rule, ...(lengths === undefined ? {} : { lengths }) });
          const split =
            splits && (sizes.length > 2 || rule.messages !== 'whole') ? HALF : undefined;
          const whole = await loadCorpusData(spec, folder, split).catch(() => undefined);
          fc.pre(whole !== undefined);
          const pieces = await openStreamedData(spec, folder, split, { chunkBytes });
          const cells = cellsFor(
            [CANDIDATES[seed % CANDIDATES.length]],
            split === undefined ? ['sent', 'learned'] : ['sent', 'learned', 'shipped', 'primed'],
          );
          for (const cell of cells) {
            const a = bitsOf(await runCell(cell, whole, pause));
            const parts: Uint8Array[] = [];
            const options = {
              modelBytes: 2 ** 28,
              fitBits: () => undefined,
              folder: coded,
              copy: (bytes: Uint8Array) => parts.push(bytes.slice()),
            };
            const b = bitsOf(await runStreamedCell(cell, pieces, options, pause));
            const { idealBits = 0, fitBits: _, ...exact } = a.totals;
            const { idealBits: priced = 0, ...got } = b.totals;
            expect(got).toEqual(exact);
            expect(Math.abs(priced - idealBits)).toBeLessThanOrEqual(1e-9 * (1 + idealBits));
            expect(b.messageBits).toEqual(a.messageBits);
            expect(b.messageEnds).toEqual(a.messageEnds);
            const bytes = Buffer.concat(a.units.map((unit) => unit.coded.bytes));
            expect(Buffer.concat(parts).equals(bytes)).toBe(true);
          }
        },
      ),
      {
        numRuns: 25,
        // A line that ends with its chunk, whose end comes with the next: its symbols must have been copied.
        examples: [[[711, 1], { messages: 'lines' }, undefined, 2, false, 4]],
      },
    );
    expect(readdirSync(coded)).toEqual([]);
  }, 30_000);

  test('fails with a reason where its model outgrows the memory, and leaves no file behind', async () => {
    writeFileSync(
      join(folder, 'noise.bin'),
      readings(60_000, 9).map((b, i) => b ^ (i * i)),
    );
    const data = await openStreamedData(specOf(['noise.bin']), folder, undefined, {});
    const [cell] = cellsFor(['arith:order=2'], ['learned']);
    const options = { modelBytes: 100_000, fitBits: () => undefined, folder: coded };
    const result = await runStreamedCell(cell, data, options, pause);
    expect(result).toMatchObject({ failure: expect.stringContaining('allow more memory') });
    expect(readdirSync(coded)).toEqual([]);
  });

  test('leaves no file behind when it is interrupted', async () => {
    writeFileSync(join(folder, 'stopped.bin'), readings(300_000, 3));
    const data = await openStreamedData(specOf(['stopped.bin']), folder, undefined, {
      chunkBytes: 1024,
    });
    const [cell] = cellsFor(['huffman'], ['sent']);
    const options = { modelBytes: 2 ** 28, fitBits: () => undefined, folder: coded };
    const stop = new Error('stop');
    const stopAt = (step: string) =>
      runStreamedCell(cell, data, options, async (at) => {
        if (at !== step) return;
        expect(readdirSync(coded)).toHaveLength(step === 'train' ? 0 : 1);
        throw stop;
      });
    for (const step of ['train', 'encode', 'decode', 'price'])
      await expect(stopAt(step)).rejects.toBe(stop);
    expect(readdirSync(coded)).toEqual([]);
  });

  test('that needs all data at once says so', async () => {
    const data = await openStreamedData(specOf(['noise.bin']), folder, undefined, {});
    for (const text of ['block-huffman:n=2', 'brotli', 'huffman:after=delta']) {
      const [cell] = listCells(['uplink'], [parseCandidate(text)], ['sent'], ['message']).cells;
      const options = { modelBytes: 2 ** 28, fitBits: () => undefined };
      const result = await runStreamedCell(cell, data, options, pause);
      expect(result).toMatchObject({ failure: expect.stringContaining('needs all data at once') });
    }
  });
});

describe('a run in pieces', () => {
  test('has the entropies, fits and figures of a run of the whole', async () => {
    writeFileSync(join(folder, 'a.log'), readings(5000, 1));
    writeFileSync(join(folder, 'b.log'), readings(2000, 2));
    const spec = specOf(['a.log', 'b.log'], { messages: 'lines' });
    const asked = {
      title: 'lines',
      candidates: CANDIDATES.map(parseCandidate),
      policies: ['shipped', 'sent', 'learned'] as const,
      resets: ['message', 'never'] as const,
      align: 8,
      billStepBytes: 3,
      lossRate: 0.01,
      split: 'the first 50 % by message',
    };
    const whole = await runAll({ ...asked, corpora: [await loadCorpusData(spec, folder, HALF)] });
    const data = await openStreamedData(spec, folder, HALF, { chunkBytes: 512 });
    const pieces = await runStreamed(
      boundedRequest({ ...asked, corpora: [data], memoryBytes: 512e6 }),
    );
    expect(runRecordSchema.parse(pieces.record)).toBeDefined();
    for (const cell of pieces.record.cells) {
      const other = whole.record.cells.find(({ id }) => id === cell.id)!;
      // What lies on the floor, and what only the whole path looks for.
      const { account, encoder: _e, decoder: _d, decode_delay_bytes: _b, ...rest } = other;
      const { rate_without_repeats: _r, holds_whole_message: _h, ...exact } = rest;
      const { account: own, ...got } = cell;
      expect(got).toEqual(exact);
      const fittedBits = (lines: typeof own) =>
        lines!.floor! + lines!.opening! + (lines!.structure ?? Number.NaN);
      if (own!.structure !== undefined && account!.structure !== undefined)
        expect(fittedBits(own)).toBeCloseTo(fittedBits(account), 2);
      for (const line of ['rounding', 'tables', 'index', 'framing', 'ends', 'check'] as const)
        expect(own![line]!).toBeCloseTo(account![line]!, 2);
      expect(pieces.messages.get(cell.id)).toEqual(whole.messages.get(cell.id));
    }
    for (const entropy of pieces.record.entropy) {
      const other = whole.record.entropy.find((e) => e.contexts === entropy.contexts)!;
      entropy.orders.forEach((order, k) => {
        const { k: kind, plug_in, corrected, positions, contexts, pairs, estimable } = order;
        expect(other.orders[k]).toMatchObject({
          k: kind,
          plug_in,
          corrected,
          positions,
          contexts,
          pairs,
          estimable,
          interval_unit: order.interval_unit,
        });
        expect(order.low!).toBeCloseTo(other.orders[k].low!, 5);
        expect(order.high!).toBeCloseTo(other.orders[k].high!, 5);
      });
    }
  }, 20_000);
});

describe('StreamComparison', () => {
  const chunks = function* () {
    yield { alphabetSize: 256, symbols: Uint8Array.of(1, 2, 3), messageEnds: Uint32Array.of(2) };
    yield { alphabetSize: 256, symbols: Uint8Array.of(4, 5), messageEnds: Uint32Array.of(2) };
  };
  const compared = (symbols: number[], ends: number[], bits = 40): (() => void) => {
    return () => {
      const comparison = new StreamComparison(chunks(), Uint32Array.of(2, 3));
      let from = 0;
      for (const end of ends) {
        comparison.take(Uint8Array.from(symbols), from, Math.min(end, symbols.length));
        comparison.end();
        from = end;
      }
      comparison.take(Uint8Array.from(symbols), from, symbols.length);
      comparison.finish(bits, 40);
    };
  };

  test('passes what was coded and refuses all else', () => {
    expect(compared([1, 2, 3, 4, 5], [2, 5])).not.toThrow();
    for (const [symbols, ends, bits] of [
      [
        [1, 2, 3, 9, 5],
        [2, 5],
      ],
      [
        [1, 2, 3, 4],
        [2, 4],
      ],
      [
        [1, 2, 3, 4, 5, 6],
        [2, 5],
      ],
      [
        [1, 2, 3, 4, 5],
        [3, 5],
      ],
      [[1, 2, 3, 4, 5], [2]],
      [[1, 2], [2]],
      [[1, 2, 3, 4, 5], [2, 5], 48],
    ] as [number[], number[], number?][]) {
      expect(compared(symbols, ends, bits)).toThrow(CorruptStreamError);
    }
  });
});

describe('CodedFile', () => {
  test('reads what was written, also where a read passes the end, and is gone afterwards', () => {
    const file = new CodedFile(coded);
    const [name] = readdirSync(coded);
    file.write(Uint8Array.of(1, 2, 3));
    file.write(Uint8Array.of(4));
    const into = new Uint8Array(3);
    const source = file.source();
    expect(source.byteLength).toBe(4);
    expect(source.read(into, 2)).toBe(2);
    expect([...into]).toEqual([3, 4, 0]);
    expect(source.read(into, 4)).toBe(0);
    file.close();
    expect(existsSync(join(coded, name))).toBe(false);
  });

  test('says in which folder it cannot be made', () => {
    expect(() => new CodedFile(join(coded, 'missing'))).toThrow('missing');
  });
});
