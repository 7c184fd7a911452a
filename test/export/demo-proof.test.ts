/**
 * What the demo could ship, exported: every message of train and test, 10 000 adversarial and 10 000 damaged ones, in C built for size,
 * in C under sanitizers, and in TypeScript.
 */
import { beforeAll, describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import { readPlan } from '../../src/corpus/plan.ts';
import { exportSubject } from '../../src/export/export-subject.ts';
import { exportedCoder } from '../../src/export/exporters.ts';
import { proveExport } from '../../src/export/prove-export.ts';
import type { CorpusData } from '../../src/harness/corpus-data.ts';
import { requestOf } from '../../src/harness/plan-request.ts';

let corpora: readonly CorpusData[] = [];

beforeAll(async () => {
  const plan = new URL('../../corpora-demo/plan.yaml', import.meta.url).pathname;
  corpora = (await requestOf(await readPlan(plan))).corpora;
}, 60_000);

const candidates: [corpus: string, candidate: string][] = [
  ['telemetry', 'fields:auto,range=32'],
  ['telemetry', 'arith:order=0,position=24,range=32'],
  ['events', 'huffman'],
  ['events', 'block-huffman:n=2'],
  ['events', 'arith:order=0,range=32'],
  ['events', 'arith:order=1,range=32'],
  ['events', 'arith:order=2,range=32'],
  ['events', 'rice'],
  ['events', 'golomb'],
  ['events', 'exp-golomb'],
];

describe('the demo exported and proven', () => {
  it.each(candidates)('%s by %s', { timeout: 120_000 }, async (name, text) => {
    const corpus = corpora.find((c) => c.name === name)!;
    const candidate = parseCandidate(text);
    const subject = exportSubject(candidate, corpus, 8);
    const proofs = await proveExport(subject, exportedCoder(candidate, subject.setup), ['c', 'ts']);
    const messages = subject.train.messageEnds.length + subject.test!.messageEnds.length + 10_000;
    expect(proofs.map((proof) => proof.what)).toEqual([
      'C99, gcc -Os',
      'C99, gcc with sanitizers',
      'TypeScript, its types taken off',
    ]);
    for (const proof of proofs) {
      expect(proof.messages).toBe(messages);
      expect(proof.damaged).toBe(10_000);
      // Both verdicts must occur, or the damage shows nothing.
      expect(proof.refused).toBeGreaterThan(1000);
      expect(proof.refused).toBeLessThan(10_000);
    }
  });
});
