import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Setup, TablePolicy, UnitReset } from '../../src/coders/contract.ts';
import { parsePlan } from '../../src/corpus/plan.ts';
import { costFigures, costRecord } from '../../src/harness/cost-figures.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';

/** Three messages of unlike lengths. */
const sequence: SymbolSequence = {
  alphabetSize: 256,
  symbols: Uint8Array.from({ length: 300 }, (_, i) => (i * i) % 23),
  messageEnds: Uint32Array.of(40, 200, 300),
};

function unitOf(text: string, policy: TablePolicy, reset: UnitReset = 'message') {
  const coder = parseCandidate(text).create();
  const base: Setup = { policy, alphabetSize: 256, reset, lengths: 'link', align: 8 };
  const trains = policy === 'shipped' || (policy === 'sent' && reset === 'never');
  const trainer = trains ? coder.trainer!(base) : undefined;
  trainer?.push(sequence);
  const setup = trainer === undefined ? base : { ...base, tables: trainer.finish() };
  const encoder = coder.encoder(setup);
  encoder.push(sequence);
  return { coder, unit: { messages: sequence, setup, coded: encoder.finish() } };
}

function delayOf(text: string, policy: TablePolicy, reset?: UnitReset, mapBits = 0) {
  const { coder, unit } = unitOf(text, policy, reset);
  return { ...costFigures(coder, [unit], mapBits), unit };
}

describe('decode delay', () => {
  it.each([
    ['huffman', 'shipped', 4],
    ['block-huffman:n=2', 'shipped', 4],
    ['arith:order=1', 'shipped', 6],
    ['arith:order=1,range=32', 'learned', 4],
    ['rice', 'learned', 4],
    ['fixed', 'none', 1],
    ['huffman:after=delta', 'shipped', 4],
  ] as const)('%s, %s: the window of its stage', (text, policy, bytes) => {
    const { delayBytes, holdsMessage } = delayOf(text, policy);
    expect(delayBytes).toBe(bytes);
    expect(holdsMessage).toBeUndefined();
  });

  it('adds the tables that stand before: their mean a message, or those of the unit', () => {
    const each = delayOf('huffman', 'sent');
    expect(each.delayBytes).toBeCloseTo(4 + each.unit.coded.account.tableBits / 3 / 8, 9);
    const once = delayOf('huffman', 'sent', 'never');
    expect(once.delayBytes).toBeCloseTo(4 + once.unit.coded.account.tableBits / 8, 9);
  });

  it('adds the alphabet map', () => {
    expect(delayOf('huffman', 'shipped', 'message', 80).delayBytes).toBe(14);
  });

  it.each([
    ['deflate', 'none'],
    ['huffman:after=bit-planes', 'shipped'],
    ['huffman:stored=on', 'shipped'],
  ] as const)('%s: the whole message, on average', (text, policy) => {
    const { delayBytes, holdsMessage, unit } = delayOf(text, policy);
    expect(holdsMessage).toBe(true);
    expect(delayBytes).toBeCloseTo(unit.coded.messageEndsBits[2] / 8 / 3, 9);
  });

  it('is never more than the longest message', () => {
    const { coder, unit } = unitOf('arith:order=0', 'shipped');
    const short: SymbolSequence = {
      alphabetSize: 256,
      symbols: Uint8Array.of(1),
      messageEnds: Uint32Array.of(1),
    };
    const encoder = coder.encoder(unit.setup);
    encoder.push(short);
    const coded = encoder.finish();
    const { delayBytes } = costFigures(coder, [{ ...unit, messages: short, coded }], 0);
    expect(delayBytes).toBe(coded.messageEndsBits[0] / 8);
  });
});

describe('costs of a cell', () => {
  it('are the same twice, and over several units the sums and the worst', () => {
    const { coder, unit } = unitOf('arith:order=1', 'shipped');
    const once = costFigures(coder, [unit], 0);
    expect(costFigures(coder, [unit], 0)).toEqual(once);
    const twice = costFigures(coder, [unit, unit], 0).operations!;
    for (const end of ['encoder', 'decoder'] as const) {
      const { symbolCount, total, worst } = once.operations![end];
      expect(symbolCount).toBe(300);
      expect(twice[end].symbolCount).toBe(600);
      expect(twice[end].worst).toEqual(worst);
      expect(twice[end].total.tableReads).toBe(2 * total.tableReads);
    }
  });

  it('hold the longest coded message at the encoder of an arithmetic code', () => {
    const { coder, unit } = unitOf('arith:order=0', 'shipped');
    const { encoder, decoder } = costFigures(coder, [unit], 0).costs!;
    const [first, second, third] = unit.coded.messageEndsBits;
    const longest = Math.max(first, second - first, third - second) / 8;
    expect(encoder.ramBytes - decoder.ramBytes).toBe(longest);
  });

  it('are written down with means', () => {
    const { coder, unit } = unitOf('huffman', 'shipped');
    const figures = costFigures(coder, [unit], 0);
    const { encoder, decode_delay_bytes, holds_whole_message } = costRecord(figures);
    expect(encoder!.flash_bytes).toBe(figures.costs!.encoder.flashBytes);
    // Two reads a word, none of which is long.
    expect(encoder!.operations!.table_reads).toEqual({ total: 600, mean: 2, worst: 2 });
    expect(decode_delay_bytes).toBe(4);
    expect(holds_whole_message).toBeUndefined();
  });

  it('are absent where the coder does not tell', () => {
    const { coder, unit } = unitOf('deflate', 'none');
    const { encoder, decoder } = costRecord(costFigures(coder, [unit], 0));
    expect(encoder).toBeUndefined();
    expect(decoder).toBeUndefined();
    expect(costFigures(coder, [], 0)).toEqual({});
  });
});

describe('product in a plan', () => {
  const plan = (product: string) =>
    parsePlan(
      `plan: 1\ncorpora: {a: {files: x, symbols: bytes, messages: lines}}\ncandidates: [fixed]\n${product}`,
      'a.yaml',
    );

  it('names the small end', () => {
    expect(plan('product: {device: decoder}\n').device).toBe('decoder');
    expect(plan('').device).toBeUndefined();
  });

  it('refuses another end', () => {
    expect(() => plan('product: {device: both}\n')).toThrow(/product\.device/);
  });
});
