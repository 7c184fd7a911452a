import { describe, expect, it } from 'vitest';
import { compareRun } from '../../src/compare/compare-run.ts';
import { parsePlan } from '../../src/corpus/plan.ts';
import { requestOf } from '../../src/harness/plan-request.ts';
import { type RunRequest, runAll } from '../../src/harness/run-all.ts';
import { runScreen } from '../../src/report/run-screen.ts';
import { sliceMessages } from '../../src/symbols/sequence.ts';

const PLAN = `
plan: 1
corpora:
  telemetry:
    files: telemetry.bin
    record: {bytes: 24, fields: {dt: u16le@0, supply: s16le@4, door: u1@10.0}}
    symbols: bytes
    messages: records=20
    fields: {dt: xor/value, supply: delta/last}
candidates: [fields, "fields:auto"]
tables: [shipped, learned]
reset: [message, never]
`;

/** What the plan asks for, on the first messages of each part: enough to see what goes where. */
async function requestFor(text: string): Promise<RunRequest> {
  const {
    timing: _,
    ageing: __,
    ...request
  } = await requestOf(parsePlan(text, 'corpora-demo/plan.yaml'));
  const corpora = request.corpora.map((corpus) => ({
    ...corpus,
    train: sliceMessages(corpus.train!, 0, 40),
    test: sliceMessages(corpus.test, 0, 40),
    testFiles: [{ ...corpus.testFiles[0], messageEnd: 40 }],
    repeated: { share: 0, mask: new Uint8Array(40) },
  }));
  return { ...request, corpora };
}

describe('fields in a run', () => {
  it('gives cells, an account a field, and a screen that shows it', async () => {
    const { record } = await runAll(await requestFor(PLAN));
    expect(record.cells.map((cell) => cell.id)).toEqual([
      'telemetry/fields@shipped/message',
      'telemetry/fields@learned/message',
      'telemetry/fields@learned/never',
      'telemetry/fields:auto@shipped/message',
    ]);
    for (const cell of record.cells) {
      expect(cell.failure).toBeUndefined();
      const { floor, opening = 0, model } = cell.account!;
      const ideal = floor! + opening + model!;
      const bits = cell.fields!.reduce((sum, field) => sum + field.bits, 0);
      // Every figure is rounded to 10⁻³ bit.
      expect(Math.abs(bits - ideal)).toBeLessThan(0.05);
    }
    const choices = new Map(record.cells[0].fields!.map(({ name, choice }) => [name, choice]));
    expect([...choices.keys()].slice(0, 5)).toEqual(['dt', '@2', '@3', 'supply', '@6']);
    expect(choices.get('dt')).toBe('xor/value');
    expect(choices.get('supply')).toBe('delta/last');
    expect(choices.get('door')).toBe('raw');
    expect(choices.has('@10.1')).toBe(true);
    const screen = runScreen(record, {
      columns: 80,
      compared: compareRun(record, new Map()),
      next: 'nothing',
    });
    expect(screen).toContain('bits a record');
    expect(screen).toMatch(/^ {2}@10\.1 /m);
    for (const line of screen.split('\n')) expect([...line].length).toBeLessThanOrEqual(80);
  });

  it('says what the candidate needs where symbols are no bytes of records', async () => {
    const text = PLAN.replace('symbols: bytes', 'symbols: field:dt').replace(
      'records=20',
      'every=20',
    );
    const { record } = await runAll(await requestFor(text));
    for (const cell of record.cells)
      expect(cell.failure).toMatch(/codes the bytes of whole records, and these symbols are not/);
  });

  it('says where a plan names a field that the record does not have', () => {
    const text = PLAN.replace('{dt: xor', '{td: xor');
    expect(() => parsePlan(text, 'plan.yaml')).toThrow(/no field named "td"/);
    const overlap = PLAN.replace('supply: s16le@4', 'supply: s16le@1');
    expect(() => parsePlan(overlap, 'plan.yaml')).toThrow(/fields dt and supply overlap/);
  });
});
