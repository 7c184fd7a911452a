/**
 * Faults planted in copies of our coders, each run under the name of the sound one: the gate must catch each, name the line of the
 * account that it cost, and see no loss where none is.
 */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { type Candidate, parseCandidate } from '../../src/coders/candidate.ts';
import type { Coded, CodedInput, Coder } from '../../src/coders/contract.ts';
import { parsePlan } from '../../src/corpus/plan.ts';
import { baselineOf } from '../../src/gate/baseline.ts';
import { type CellGate, gateRun } from '../../src/gate/gate.ts';
import { requestOf } from '../../src/harness/plan-request.ts';
import { runAll } from '../../src/harness/run-all.ts';
import type { RunRecord } from '../../src/harness/run-record.ts';

let folder = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-planted-'));
  // What is frequent changes half-way.
  const lines = Array.from({ length: 600 }, (_, i) =>
    i < 300
      ? `supply ${-18 + ((i * 7) % 5)} door shut\n`
      : `HUMIDITY ${60 + ((i * i) % 9)} FAN ON\n`,
  );
  writeFileSync(join(folder, 'reefer.log'), lines.join(''));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

async function recordWith(candidate: Candidate, policy: string, reset: string): Promise<RunRecord> {
  const text = `plan: 1\ncorpora:\n  log: {files: reefer.log, symbols: bytes, messages: lines, lengths: link}\ncandidates: [fixed]\ntables: [${policy}]\nreset: [${reset}]\nalign: 8\ntiming: {repeats: 0}\n`;
  const request = await requestOf(parsePlan(text, join(folder, 'plan.yaml')));
  const { record } = await runAll({ ...request, candidates: [candidate] });
  for (const cell of record.cells) expect(cell.verified, cell.failure).toBe(true);
  return record;
}

/** The sound coder under its own name, and what is run under it instead. */
async function gated(
  sound: string,
  plant: (candidate: Candidate) => Candidate,
  policy: string,
  reset: string,
): Promise<CellGate> {
  const candidate = parseCandidate(sound);
  const before = await recordWith(candidate, policy, reset);
  const after = await recordWith(plant(candidate), policy, reset);
  const { cells, unpaired } = gateRun(baselineOf(before), after);
  expect(unpaired).toEqual([]);
  expect(cells).toHaveLength(1);
  return cells[0];
}

/** Another of our coders, or the same with other parameters, under the name of the sound one. */
const as =
  (text: string) =>
  (candidate: Candidate): Candidate => ({
    ...candidate,
    create: () => parseCandidate(text).create(),
  });

/** One byte more a message, at its front or its end, booked in a line of the integer account. */
function withByte(place: 'front' | 'end', line: 'tableBits' | 'endingBits') {
  return (candidate: Candidate): Candidate => ({
    ...candidate,
    create: () => {
      const inner = candidate.create();
      const grow = (coded: Coded): Coded => {
        const count = coded.messageEndsBits.length;
        const bytes = new Uint8Array(coded.bytes.length + count);
        const ends = new Float64Array(count);
        let from = 0;
        for (let i = 0; i < count; i++) {
          const end = coded.messageEndsBits[i] / 8;
          bytes.set(coded.bytes.subarray(from, end), from + i + (place === 'front' ? 1 : 0));
          ends[i] = 8 * (end + i + 1);
          from = end;
        }
        const account = { ...coded.account, [line]: coded.account[line] + 8 * count };
        return { ...coded, bytes, messageEndsBits: ends, account };
      };
      const shrink = (input: CodedInput): CodedInput => {
        const ends = input.messageEndsBits!;
        const bytes = new Uint8Array(input.bytes.length - ends.length);
        let from = 0;
        ends.forEach((end, i) => {
          const skip = place === 'front' ? 1 : 0;
          bytes.set(input.bytes.subarray(from + skip, from + skip + end / 8 - from - 1), from - i);
          from = end / 8;
        });
        return { ...input, bytes, messageEndsBits: ends.map((end, i) => end - 8 * (i + 1)) };
      };
      const coder: Coder = {
        declares: inner.declares,
        price: (sequence, setup) => inner.price!(sequence, setup),
        encoder: (setup) => {
          const encoder = inner.encoder(setup);
          return { push: (chunk) => encoder.push(chunk), finish: () => grow(encoder.finish()) };
        },
        decoder: (setup, limits) => {
          const decoder = inner.decoder(setup, limits);
          return {
            decode: (input) => {
              const decoded = decoder.decode(shrink(input));
              return { ...decoded, bitsConsumed: decoded.bitsConsumed + 8 * input.messageCount };
            },
          };
        },
      };
      return coder;
    },
  });
}

const bitsVerdict = ({ checks }: CellGate) =>
  checks.find(({ figure }) => figure === 'carried_bits')?.verdict;

describe('a fault planted in a copy of', () => {
  it('nothing: the same coder again holds', async () => {
    const cell = await gated('huffman', (sound) => sound, 'sent', 'message');
    expect([cell.verdict, cell.lines]).toEqual(['held', []]);
  });

  it('huffman, a byte more in each table it sends: tables', async () => {
    const cell = await gated('huffman', withByte('front', 'tableBits'), 'sent', 'message');
    expect(bitsVerdict(cell)).toBe('lost');
    expect(cell.now! - cell.was!).toBe(8 * 600);
    expect(cell.lines).toHaveLength(1);
    const [{ line, was, now, per }] = cell.lines;
    expect([line, now - was]).toEqual(['tables', 8 * 600]);
    expect(per!.now - per!.was).toBeCloseTo(8, 9);
  });

  it('arith, a byte too many at each end: ends', async () => {
    const cell = await gated('arith:order=0', withByte('end', 'endingBits'), 'learned', 'message');
    expect(bitsVerdict(cell)).toBe('lost');
    expect(cell.lines.map(({ line, was, now }) => [line, Math.round(now - was)])).toEqual([
      ['ends', 8 * 600],
    ]);
  });

  it('arith that halves its counts, halving lost: learning, or the model where these are one', async () => {
    const cell = await gated(
      'arith:order=0,halve_at=2000',
      as('arith:order=0'),
      'learned',
      'never',
    );
    expect(bitsVerdict(cell)).toBe('lost');
    expect(['learning', 'model']).toContain(cell.lines[0].line);
  });

  it('arith that backs off, escapes never learnt: learning, or the model', async () => {
    const cell = await gated(
      'arith:order=1',
      as('arith:order=1,backoff=none,counts=laplace'),
      'learned',
      'never',
    );
    expect(bitsVerdict(cell)).toBe('lost');
    expect(['learning', 'model']).toContain(cell.lines[0].line);
  });
});
