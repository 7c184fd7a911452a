/**
 * What steps gain on open data: an audio recording (package audio-lena), a rain grid and hourly temperatures (vega-datasets). Every number was
 * computed by a Python script that shares nothing with this program: residues folded by its own hand, each parameter tried
 * on the counts, Huffman lengths from a heap.
 */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { ensureDatasets } from '../../scripts/datasets.mjs';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Setup } from '../../src/coders/contract.ts';
import { oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';
import { decode, encode, inputOf } from '../conformance/cells.ts';

const setup: Setup = {
  policy: 'sent',
  alphabetSize: 65_536,
  reset: 'message',
  lengths: 'sent',
  align: 8,
};

const files: Record<string, SymbolSequence> = {};

beforeAll(async () => {
  const folder = await ensureDatasets();
  const take = (file: string, flip: number) => {
    const bytes = readFileSync(join(folder, file));
    const symbols = new Uint16Array(bytes.length / 2);
    for (let i = 0; i < symbols.length; i++) symbols[i] = bytes.readUInt16LE(2 * i) ^ flip;
    files[file] = oneMessage(symbols, 65_536);
  };
  take('lena.s16', 0x8000);
  take('precip.u16', 0);
  // Tenths of a degree above the least of them.
  const rows = readFileSync(join(folder, 'weather.csv'), 'utf8').trim().split('\n').slice(1);
  const tenths = rows.map((row) => Math.round(Number(row.split(',')[2]) * 10));
  const least = Math.min(...tenths);
  files['weather.csv'] = oneMessage(
    Uint16Array.from(tenths, (value) => value - least),
    65_536,
  );
});

describe('delta.zigzag on open data', () => {
  it.each([
    // file, candidate, Σ word lengths in bits
    ['lena.s16', 'rice', 8_930_641],
    ['lena.s16', 'rice:after=delta.zigzag', 6_212_473],
    ['lena.s16', 'exp-golomb:after=delta.zigzag', 6_203_474],
    ['lena.s16', 'huffman', 7_503_210],
    ['lena.s16', 'huffman:after=delta.zigzag', 6_073_057],
    ['precip.u16', 'rice', 699_729],
    ['precip.u16', 'rice:after=delta.zigzag', 595_531],
    ['precip.u16', 'exp-golomb', 714_976],
    ['precip.u16', 'exp-golomb:after=delta.zigzag', 556_702],
    ['precip.u16', 'golomb:after=delta.zigzag', 582_686],
    ['precip.u16', 'huffman', 683_711],
    ['precip.u16', 'huffman:after=delta.zigzag', 543_478],
    ['weather.csv', 'rice', 68_193],
    ['weather.csv', 'rice:after=delta.zigzag', 42_314],
    ['weather.csv', 'exp-golomb:after=delta.zigzag', 45_054],
    ['weather.csv', 'huffman', 65_871],
    ['weather.csv', 'huffman:after=delta.zigzag', 39_811],
  ])('%s, %s: %i bits of words', (file, candidate, bits) => {
    const sequence = files[file];
    const coder = parseCandidate(candidate).create();
    const coded = encode(coder, setup, [sequence]);
    expect(coded.payloadBits).toBe(bits);
    const input = inputOf(setup, coded, sequence);
    const decoded = decode(coder, setup, input, sequence.symbols.length).sequence;
    expect(Buffer.compare(bytesOf(decoded), bytesOf(sequence))).toBe(0);
  });
});

function bytesOf({ symbols }: SymbolSequence): Uint8Array {
  return new Uint8Array(symbols.buffer, symbols.byteOffset, symbols.byteLength);
}
