import { describe, expect, it } from 'vitest';
import { parseCandidates } from '../../src/coders/candidate.ts';
import { compareRun } from '../../src/compare/compare-run.ts';
import type { CorpusData } from '../../src/harness/corpus-data.ts';
import { type RunRequest, runAll } from '../../src/harness/run-all.ts';
import { type RunRecord, runRecordSchema } from '../../src/harness/run-record.ts';
import { runScreen } from '../../src/report/run-screen.ts';

function corpusOf(lengths: readonly number[], more: Partial<CorpusData> = {}): CorpusData {
  let at = 0;
  const messageEnds = Uint32Array.from(lengths, (length) => (at += length));
  return {
    name: 'a',
    key: 'a',
    sha256: '',
    symbolsAs: 'bytes',
    messagesAs: 'lines',
    lengths: 'known',
    alphabetSize: 256,
    sourceBytes: at,
    test: {
      alphabetSize: 256,
      symbols: Uint8Array.from({ length: at }, (_, i) => (i * i) % 251),
      messageEnds,
    },
    testFiles: [{ path: 'a', sha256: '', messageEnd: lengths.length }],
    ...more,
  };
}

const requestOf = (corpus: CorpusData, billStepBytes?: number): RunRequest => ({
  title: 't',
  corpora: [corpus],
  candidates: parseCandidates('fixed'),
  policies: ['learned'],
  resets: ['message'],
  align: 8,
  split: 'none',
  ...(billStepBytes === undefined ? {} : { billStepBytes }),
});

describe('billing in steps', () => {
  it('rounds each message up by itself', async () => {
    // Fixed width, bytes, lengths known: a message of n symbols is n bytes.
    const lengths = [0, 1, 9, 10, 11, 20, 25];
    const { record } = await runAll(requestOf(corpusOf(lengths), 10));
    const steps = 0 + 1 + 1 + 1 + 2 + 2 + 3;
    expect(record.cells[0].billing).toEqual({
      step_bytes: 10,
      steps,
      steps_per_unit: steps / 7,
      unused_share: 1 - 76 / (10 * steps),
    });
    expect(record.plan.bill_step_bytes).toBe(10);
    expect(runRecordSchema.parse(record)).toEqual(record);
  });

  it('bills nothing of its own where steps are single bytes, and one step a message where they are long', async () => {
    const corpus = corpusOf([3, 5, 8]);
    const bytes = (await runAll(requestOf(corpus, 1))).record.cells[0];
    expect(bytes.billing).toMatchObject({ steps: 16, unused_share: 0 });
    const long = (await runAll(requestOf(corpus, 1000))).record.cells[0];
    expect(long.billing).toMatchObject({ steps: 3, steps_per_unit: 1 });
    expect(long.billing!.unused_share).toBeCloseTo(1 - 16 / 3000, 12);
  });

  it('bills an alphabet map that is sent as a message of its own', async () => {
    const sentMap = { bytes: Uint8Array.of(1, 2, 3), bits: 24 };
    const { record } = await runAll(requestOf(corpusOf([10, 10], { sentMap }), 10));
    expect(record.cells[0].billing).toMatchObject({ steps: 3, unused_share: 1 - 23 / 30 });
  });

  it('counts by units where messages are filled', async () => {
    const fill = { bytes: 50, unitSymbols: 8 };
    const corpus = corpusOf(new Array(40).fill(8), {
      fill,
      lengths: 'link',
      messagesAs: 'fill=50,unit=8',
    });
    const [cell] = (await runAll(requestOf(corpus, 50))).record.cells;
    // A step of the whole budget: one for each message.
    expect(cell.billing!.steps).toBe(cell.message_count);
    expect(cell.billing!.steps_per_unit).toBe(cell.message_count! / 40);
  });

  it('shows only where it is asked for', async () => {
    const screenOf = (record: RunRecord) =>
      runScreen(record, { columns: 100, compared: compareRun(record, new Map()), next: 'nothing' });
    const corpus = corpusOf([3, 5, 8]);
    const asked = screenOf((await runAll(requestOf(corpus, 4))).record);
    expect(asked).toContain('steps/');
    // ⌈3/4⌉ + ⌈5/4⌉ + ⌈8/4⌉ = 5 steps for 3 messages.
    expect(asked).toContain('1.67');
    expect(asked).toContain('steps of 4 bytes');
    const plain = await runAll(requestOf(corpus));
    expect(plain.record.cells[0].billing).toBeUndefined();
    expect(screenOf(plain.record)).not.toContain('steps');
  });
});
