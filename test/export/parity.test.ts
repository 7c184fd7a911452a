/** Exported coders do to the bit what the program's own do, in C and in TypeScript. */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Lengths, Setup } from '../../src/coders/contract.ts';
import { trainOn } from '../../src/coders/verify.ts';
import { adversarialMessages } from '../../src/export/adversarial.ts';
import { cFiles } from '../../src/export/c-files.ts';
import { exportedCoder } from '../../src/export/exporters.ts';
import { expectation, prove } from '../../src/export/prove.ts';
import { buildC } from '../../src/export/run-c.ts';
import { loadModule } from '../../src/export/run-ts.ts';
import { tsFile } from '../../src/export/ts-file.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';

const naming = { name: 'tracker', provenance: ['Made by a test.'] };

async function proven(text: string, sequences: SymbolSequence[], base: Omit<Setup, 'tables'>) {
  const candidate = parseCandidate(text);
  const policy = candidate.declaration.policies.includes('none') ? 'none' : 'shipped';
  const own: Setup = { ...base, policy };
  const tables = trainOn(candidate, own, sequences[0]);
  const setup: Setup = tables === undefined ? own : { ...own, tables };
  const coder = exportedCoder(candidate, setup);
  const folder = mkdtempSync(join(tmpdir(), 'bitassay-export-'));
  try {
    const files = cFiles(coder, setup, naming);
    const module = join(folder, 'tracker.mjs');
    writeFileSync(module, tsFile(coder, setup, naming, false));
    const runners = [
      buildC(files, naming.name, setup, folder, { sanitize: false }),
      buildC(files, naming.name, setup, folder, { sanitize: true }),
      await loadModule(module),
    ];
    const expected = expectation(candidate, setup, sequences, 500);
    return runners.map((run) => prove(expected, run));
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

const shapes: [alphabet: number, lengths: Lengths, align: number, units: number][] = [
  [256, 'link', 8, 1],
  [256, 'known', 32, 1],
  [256, 'sent', 8, 24],
  [1, 'link', 8, 1],
  [2, 'sent', 16, 1],
  [300, 'link', 8, 1],
  [65536, 'sent', 8, 1],
];

const candidates = [
  'huffman',
  'huffman:maxbits=32,unseen=add:1/1000',
  'block-huffman:n=1',
  'block-huffman:n=2',
  'block-huffman:n=3',
  'arith:order=0,range=32',
  'arith:order=0,range=32,position=24,unseen=add:1',
  'arith:order=0,range=32,unseen=add:1/2',
  'arith:order=1,range=32',
  'arith:order=2,range=32,position=3',
  'arith:order=1,range=32,unseen=add:1/2',
  'arith:order=2,range=32,total_bits=20',
  'rice',
  'rice:k=0',
  'golomb',
  'golomb:m=1',
  'golomb:m=11',
  'golomb:m=16',
  'exp-golomb',
  'exp-golomb:k=0',
  'exp-golomb:k=24',
];

/** Every shape for one of a kind; the rest differ from it in their words only. */
const shapesOf = (text: string) =>
  ['huffman', 'arith:order=1,range=32', 'exp-golomb'].includes(text)
    ? shapes
    : shapes.filter(([size]) => size < 65536 && size !== 2);

describe.each(candidates)('%s exported', (text) => {
  it.each(shapesOf(text))(
    'for %i symbols under lengths %s, align %i, units of %i',
    { timeout: 120_000 },
    async (alphabetSize, lengths, align, unitSymbols) => {
      const train = adversarialMessages(alphabetSize, unitSymbols, 100, 7);
      const other = adversarialMessages(alphabetSize, unitSymbols, 400, 8);
      const base = {
        policy: 'shipped',
        alphabetSize,
        reset: 'message',
        lengths,
        align,
        ...(unitSymbols === 1 ? {} : { unitSymbols }),
      } as const;
      const proofs = await proven(text, [train, other], base);
      for (const proof of proofs) expect(proof.messages).toBe(500);
    },
  );
});
