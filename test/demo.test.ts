import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { beforeAll, describe, expect, it } from 'vitest';
import { parseCandidates } from '../src/coders/candidate.ts';
import type { Reset, TablePolicy } from '../src/coders/contract.ts';
import { chooseForCorpus } from '../src/compare/choose-corpus.ts';
import type { Limits } from '../src/compare/limits.ts';
import type { CorpusSpec } from '../src/corpus/corpus.ts';
import type { SplitRule } from '../src/corpus/decide-split.ts';
import { parsePlan } from '../src/corpus/plan.ts';
import { loadCorpusData } from '../src/harness/load-corpus-data.ts';
import { requestOf } from '../src/harness/plan-request.ts';
import { type MessagePairs, type RunResult, runAll } from '../src/harness/run-all.ts';
import type { CellRecord } from '../src/harness/run-record.ts';
import { intoBlocks, pairedDifference } from '../src/statistics/paired-difference.ts';

/**
 * What the demo claims, decided by a paired bootstrap whose interval must exclude 0. Nothing here is a kept figure: each
 * claim is an order of two rates, or a share between them.
 */

const folder = fileURLToPath(new URL('../corpora-demo', import.meta.url));
const halves: SplitRule = { by: 'message', order: 'in_time', train: 0.5 };

async function run(
  spec: Partial<CorpusSpec> & Pick<CorpusSpec, 'files' | 'messages'>,
  candidates: readonly string[],
  policies: readonly TablePolicy[],
  resets: readonly Reset[],
  rule?: SplitRule,
): Promise<RunResult> {
  const corpus = await loadCorpusData({ name: 'demo', symbols: 'bytes', ...spec }, folder, rule);
  return runAll({
    title: 'demo',
    corpora: [corpus],
    candidates: candidates.flatMap(parseCandidates),
    policies,
    resets,
    align: 8,
    split: '',
  });
}

function rateOf(result: RunResult, id: string): number {
  const cell = result.record.cells.find((c) => c.id === `demo/${id}`);
  expect(cell?.verified, `${id} ${cell?.failure}`).toBe(true);
  return cell!.rate!;
}

/**
 * Bits and symbols by message. Tables sent once stand in the first message; their bits are spread over all symbols here, since
 * a bootstrap that draws the first message twice or not at all would take their cost for chance.
 */
function spreadTables(result: RunResult, id: string): MessagePairs {
  const cell = result.record.cells.find((c) => c.id === `demo/${id}`)!;
  const { bits, symbols } = result.messages.get(cell.id)!;
  if (cell.reset === 'message') return { bits, symbols };
  const tables = cell.account!.tables!;
  return {
    bits: bits.map(
      (b, i) => b - (i === 0 ? tables : 0) + (tables * symbols[i]) / cell.symbol_count!,
    ),
    symbols,
  };
}

/** Bits per symbol by which `b` needs more than `a`, once the interval excludes 0. */
function decidedDifference(result: RunResult, a: string, b: string): number {
  const [sideA, sideB] = [spreadTables(result, a), spreadTables(result, b)];
  // Neighbouring messages are grouped where there are many of them.
  const group = (values: Float64Array) => intoBlocks(values, 256);
  const found = pairedDifference({
    bitsA: group(sideA.bits),
    bitsB: group(sideB.bits),
    symbols: group(sideA.symbols),
    seed: 1,
    repetitions: 2000,
  });
  expect(found.decided, `${a} against ${b}: ${found.low} to ${found.high}`).toBe(true);
  return found.difference;
}

function bestOf(result: RunResult, select: (id: string) => boolean): string {
  const cells = result.record.cells.filter((c) => c.verified && !c.reference && select(c.id));
  return cells.reduce((a, b) => (b.rate! < a.rate! ? b : a)).id.slice('demo/'.length);
}

const families = ['huffman', 'block-huffman:n=2', 'arith:order=0..6'];

describe('kept as whole files', () => {
  // One block of 2048 bytes is one message here, and nothing resets: the same code as for a whole file, but with bits by
  // block, over which the bootstrap resamples.
  it.each(['telemetry.bin', 'events.log', 'alerts.ndjson'])(
    '%s: the best adaptive coder needs fewer bits than any coder with sent tables',
    async (file) => {
      const result = await run(
        { files: [file], messages: 'every=2048', lengths: 'known' },
        families,
        ['sent', 'learned'],
        ['never'],
      );
      const adaptive = bestOf(result, (id) => id.includes('@learned/'));
      const sent = bestOf(result, (id) => id.includes('@sent/'));
      expect(decidedDifference(result, adaptive, sent)).toBeGreaterThan(0);
    },
    60_000,
  );
});

describe('sent as short messages', () => {
  it.each(['events.log', 'alerts.ndjson'])(
    '%s: a shipped order-1 table needs half the bits of the best adaptive coder, or fewer',
    async (file) => {
      const result = await run(
        { files: [file], messages: 'lines' },
        ['huffman', 'arith:order=0..3'],
        ['shipped', 'learned'],
        ['message'],
        halves,
      );
      const shipped = 'arith:order=1@shipped/message';
      const adaptive = bestOf(result, (id) => id.includes('@learned/'));
      expect(decidedDifference(result, shipped, adaptive)).toBeGreaterThan(0);
      expect(rateOf(result, shipped) / rateOf(result, adaptive)).toBeLessThan(0.5);
    },
    60_000,
  );

  it('telemetry.bin: on slowly drifting records that table is worse than learning in each packet', async () => {
    const result = await run(
      { files: ['telemetry.bin'], messages: 'records=8', record: { bytes: 24, fields: [] } },
      ['arith:order=0..3'],
      ['shipped', 'learned'],
      ['message'],
      halves,
    );
    const adaptive = bestOf(result, (id) => id.includes('@learned/'));
    expect(decidedDifference(result, adaptive, 'arith:order=1@shipped/message')).toBeGreaterThan(0);
  }, 60_000);
});

describe('sent as filled packets', () => {
  let result: RunResult;

  beforeAll(async () => {
    const {
      timing: _,
      ageing: __,
      ...request
    } = await requestOf(
      parsePlan(readFileSync(`${folder}/plan.yaml`, 'utf8'), `${folder}/plan.yaml`),
    );
    result = await runAll({
      ...request,
      corpora: request.corpora.filter(({ name }) => name === 'telemetry'),
    });
  }, 120_000);

  it('telemetry.bin: fields:auto carries at least twice the records of any byte-wise candidate', () => {
    const { record } = result;
    const recordsOf = (cells: typeof record.cells) =>
      Math.max(...cells.map(({ units_per_message }) => units_per_message!.mean));
    const byFields = record.cells.filter(({ coder }) => coder === 'fields');
    const byBytes = record.cells.filter(({ coder }) => coder !== 'fields');
    for (const cell of record.cells) expect(cell.verified, `${cell.id} ${cell.failure}`).toBe(true);
    // The strongest of them learn by the place of the byte in its record.
    for (const policy of ['shipped', 'learned', 'primed'])
      expect(byBytes.map(({ id }) => id)).toContain(
        `telemetry/arith:order=0,position=24@${policy}/message`,
      );
    expect(recordsOf(byFields) / recordsOf(byBytes)).toBeGreaterThanOrEqual(2);
  });

  /** Each step tightens the one before; what was picked there must break the new limit, and nothing better may be left. */
  const steps: [reason: string, limits: Limits, pick: string | undefined][] = [
    ['nothing is asked', {}, 'fields:auto,range=32@shipped'],
    [
      'the tables of all fields are too large',
      { max: { flash_bytes: 7000 } },
      'arith:order=0,position=24@learned',
    ],
    [
      'counts for each place in the record are too large; of the orders that cannot be told apart the smallest remains',
      { max: { flash_bytes: 7000, ram_bytes: 16_384 } },
      'arith:order=1@learned',
    ],
    [
      'and so are counts for each byte before',
      { max: { flash_bytes: 7000, ram_bytes: 4096 } },
      'arith:order=0@learned',
    ],
    [
      'no counts at all: two static coders cannot be told apart, and Huffman takes less',
      { max: { flash_bytes: 7000, ram_bytes: 1024 } },
      'huffman@shipped',
    ],
    ['no table fits', { max: { flash_bytes: 500, ram_bytes: 1024 } }, 'fixed@none'],
    [
      'more units are asked for than equal widths carry',
      { max: { flash_bytes: 500, ram_bytes: 1024 }, min: { units_per_message: 8 } },
      undefined,
    ],
  ];

  it('telemetry.bin: the pick changes, rightly, as each limit tightens', () => {
    const { record, messages } = result;
    const choose = (limits: Limits) =>
      chooseForCorpus(record, messages, 'telemetry', { limits, cost: {}, end: 'encoder' });
    let before: CellRecord | undefined;
    for (const [reason, limits, expected] of steps) {
      const { pick, nearest } = choose(limits);
      expect(pick?.cell.id, reason).toBe(
        expected === undefined ? undefined : `telemetry/${expected}/message`,
      );
      const broken = ({ encoder, units_per_message }: CellRecord) =>
        (encoder?.flash_bytes ?? Infinity) > (limits.max?.flash_bytes ?? Infinity) ||
        (encoder?.ram_bytes ?? Infinity) > (limits.max?.ram_bytes ?? Infinity) ||
        units_per_message!.mean < (limits.min?.units_per_message ?? 0);
      if (before !== undefined) expect(broken(before), reason).toBe(true);
      // Independent of the choice: no cell that meets the limits carries more than those the corpus cannot tell from the pick.
      const meeting = record.cells.filter((cell) => !cell.reference && !broken(cell));
      const most = Math.max(0, ...meeting.map((cell) => cell.units_per_message!.mean));
      if (pick === undefined) {
        expect(meeting).toEqual([]);
        expect(nearest).toHaveLength(3);
      } else {
        const rank = choose({}).alternatives.find(
          (a) => a.cell.units_per_message!.mean === most,
        )?.rank;
        expect(pick.cell.units_per_message!.mean === most || pick.rank === rank, reason).toBe(true);
      }
      before = pick?.cell;
    }
  });
});
