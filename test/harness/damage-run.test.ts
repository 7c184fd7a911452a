/** Damage within a run: which cells have it, where it is done, what the record says of it. */
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { type Candidate, parseCandidate } from '../../src/coders/candidate.ts';
import { parsePlan } from '../../src/corpus/plan.ts';
import type { DamagePlan } from '../../src/harness/damage-experiment.ts';
import { memoryCorpus } from '../../src/harness/memory-corpus.ts';
import { type RunRequest, runAll } from '../../src/harness/run-all.ts';
import { runRecordSchema } from '../../src/harness/run-record.ts';
import { runWith } from '../../src/harness/run-with.ts';
import { streamedRequestOf } from '../../src/harness/stream-request.ts';
import { WorkerPool } from '../../src/harness/worker-pool.ts';
import { builtFile } from './built.ts';

let cache: string;
beforeAll(() => {
  cache = mkdtempSync(join(tmpdir(), 'bitassay-damage-'));
});
afterAll(() => rmSync(cache, { recursive: true, force: true }));

const messages = (salt: number) =>
  Array.from({ length: 40 }, (_, m) =>
    Uint8Array.from({ length: 30 }, (_, i) => (m * m * salt + i * i * 7) % 23),
  );

const PLAN: DamagePlan = { flip: 0.001, lose_messages: 0.1, seed: 3 };

function requestOf(candidates: readonly Candidate[], damage?: DamagePlan): RunRequest {
  return {
    title: 'damage',
    corpora: [memoryCorpus('a', messages(5), { train: messages(3) })],
    candidates,
    policies: ['shipped', 'learned'],
    resets: ['message', 'never'],
    align: 8,
    split: '',
    ...(damage === undefined ? {} : { damage }),
  };
}

const candidates = ['fixed', 'huffman', 'arith:order=1', 'deflate'].map((text) =>
  parseCandidate(text),
);

/** Without damage. */
const plain = runAll(requestOf(candidates));
const damaged = runAll(requestOf(candidates, PLAN));

describe('damage in a run', () => {
  it('stands in the record of every verified cell, and in its plan', async () => {
    const { record } = await damaged;
    runRecordSchema.parse(record);
    expect(record.plan.damage).toEqual(PLAN);
    expect(record.cells.map(({ id }) => id)).toEqual([
      'a/fixed@none/message',
      'a/huffman@shipped/message',
      'a/arith:order=1@shipped/message',
      'a/arith:order=1@learned/message',
      'a/arith:order=1@learned/never',
      'a/deflate@none/message',
    ]);
    for (const { damage, damage_failure } of record.cells) {
      expect(damage?.map(({ kind, seed }) => [kind, seed])).toEqual([
        ['flip', 3],
        ['lose_messages', 3],
      ]);
      expect(damage_failure).toBeUndefined();
    }
  });

  it('changes nothing else', async () => {
    const { record } = await damaged;
    const { plan, cells } = (await plain).record;
    expect(plan).not.toHaveProperty('damage');
    expect(cells).toEqual(record.cells.map(({ damage: _, ...rest }) => rest));
  });

  it('is done for the cells of the plan alone, not for those that it varies', async () => {
    const request = { ...requestOf([candidates[0]], PLAN), aligns: [1] };
    const { record } = await runAll(request);
    expect(record.cells.map(({ id, damage }) => [id, damage !== undefined])).toEqual([
      ['a/fixed@none/message', true],
      ['a/fixed@none/message+align=1', false],
    ]);
  });

  it('is the same from the cache, and done anew for other damage', async () => {
    const few = candidates.slice(0, 2);
    const own = (await damaged).record.cells.slice(0, 2);
    await runWith(requestOf(few), {}, { cache });
    await runWith(requestOf(few, PLAN), {}, { cache });
    const again = await runWith(requestOf(few, PLAN), {}, { cache });
    expect(again.cellsTaken).toBe(2);
    expect(again.record.cells.map(({ damage }) => damage)).toEqual(own.map(({ damage }) => damage));
    const other = await runWith(requestOf(few, { ...PLAN, seed: 4 }), {}, { cache });
    expect(other.record.cells.map(({ damage }) => damage![0].seed)).toEqual([4, 4]);
    expect(other.record.cells[1].damage![0].symbols_lost).not.toEqual(
      own[1].damage![0].symbols_lost,
    );
  });

  it('is the same in workers', async () => {
    const request = requestOf(candidates, PLAN);
    const pool = new WorkerPool(request.corpora, { entry: builtFile('harness/worker.js') });
    try {
      const { record } = await runAll(request, {}, pool);
      expect(record.cells).toEqual((await damaged).record.cells);
    } finally {
      await pool.close();
    }
  });

  it('leaves a cell its rate where its decoder breaks on damage, and says so', async () => {
    const honest = candidates[1];
    const broken: Candidate = {
      ...honest,
      create: () => {
        const coder = honest.create();
        const decoder: typeof coder.decoder = (setup, limits) => ({
          decode: (input) => {
            if (input.messageCount === 1 && input.bytes[0] % 2 === 1) throw new RangeError('no');
            return coder.decoder(setup, limits).decode(input);
          },
        });
        return { ...coder, decoder };
      },
    };
    const { record } = await runAll(requestOf([broken], PLAN));
    expect(record.cells[0]).toMatchObject({
      verified: true,
      damage_failure: expect.stringMatching(
        /^the decoder of huffman broke on damaged bytes \(expected .*, got RangeError: no\)$/,
      ),
    });
    expect(record.cells[0]).not.toHaveProperty('damage');
  });

  it('is missing after an interrupt, and the record is partial', async () => {
    let asked = 0;
    // Once the cells are coded, all that is left here is the damage.
    const { record } = await runAll(requestOf(candidates.slice(0, 2), PLAN), {
      progress: ({ current }) => {
        if (current.includes('damage')) asked++;
      },
      interrupted: () => asked > 0,
    });
    expect(asked).toBeGreaterThan(0);
    expect(record.partial).toBe(true);
    expect(record.cells.map(({ verified, damage }) => [verified, damage])).toEqual([
      [true, undefined],
      [true, undefined],
    ]);
  });

  it('is refused for data that are read in pieces, with the line of the plan', async () => {
    const plan = parsePlan(
      `plan: 1
corpora:
  a: {files: a.bin, symbols: bytes, messages: lines}
candidates: [huffman]
memory: 512MB
damage: {flip: 0.001}
`,
      'p.yaml',
    );
    await expect(streamedRequestOf(plan, plan.corpora)).rejects.toMatchObject({
      message: 'no damage is simulated on data that are read in pieces',
      where: { file: 'p.yaml', line: 6, key: 'damage', got: 'a' },
    });
  });
});
