/** What exported C takes, as the compiler tells, beside what the coders declare. */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Lengths, Setup } from '../../src/coders/contract.ts';
import { trainOn } from '../../src/coders/verify.ts';
import { readPlan } from '../../src/corpus/plan.ts';
import { adversarialMessages } from '../../src/export/adversarial.ts';
import { cFiles } from '../../src/export/c-files.ts';
import { exportedCoder } from '../../src/export/exporters.ts';
import { type MeasuredEnd, measureC } from '../../src/export/measure-c.ts';
import { CPrinter, type PrintContext } from '../../src/export/print-c.ts';
import { requestOf } from '../../src/harness/plan-request.ts';
import { parseRecordField, type RecordShape } from '../../src/symbols/record.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';

/** The compiler of the measured figures is named in cost-measured.ts; another lays out otherwise. */
const BYTES_A_TABLE = 31;

const trainOf: Record<string, SymbolSequence> = {};
const recordOf: Record<string, RecordShape> = {};

beforeAll(async () => {
  const plan = new URL('../../corpora-demo/plan.yaml', import.meta.url).pathname;
  for (const corpus of (await requestOf(await readPlan(plan))).corpora) {
    trainOf[corpus.name] = corpus.train!;
    if (corpus.record !== undefined) recordOf[corpus.name] = corpus.record;
  }
  // Wide, narrow, signed, the lowest byte last: what the telemetry has not.
  const fields = { a: 'u8@0', b: 's16be@2', c: 's32be@4', d: 'u32le@8' };
  recordOf['mixed'] = {
    bytes: 12,
    fields: Object.entries(fields).map(([name, type]) => parseRecordField(name, type, 12)),
  };
  trainOf['mixed'] = adversarialMessages(256, 12, 200, 5);
}, 60_000);

interface End {
  readonly measured: MeasuredEnd;
  readonly declared: {
    readonly flashBytes: number;
    readonly ramBytes: number;
    readonly codeBytes: number;
  };
  /** Bytes of the tables that are printed, and how many tables. */
  readonly tableBytes: number;
  readonly tables: number;
}

function tablesOf(context: PrintContext): Pick<End, 'tableBytes' | 'tables'> {
  const { used } = new CPrinter(context);
  const printed = context.tables.filter((table) => used.has(table.name));
  return {
    tableBytes: printed.reduce((sum, t) => sum + t.values!.length * t.elementBytes, 0),
    tables: printed.length,
  };
}

function endsOf(
  corpus: string,
  text: string,
  lengths: Lengths,
): Record<'encoder' | 'decoder', End> {
  const candidate = parseCandidate(text);
  const policy = candidate.declaration.policies.includes('none') ? 'none' : 'shipped';
  const record = recordOf[corpus];
  const base: Setup = {
    policy,
    alphabetSize: 256,
    reset: 'message',
    lengths,
    align: 8,
    ...(record === undefined ? {} : { record, unitSymbols: record.bytes }),
  };
  const train = trainOf[corpus];
  const tables = trainOn(candidate, base, train);
  const setup = tables === undefined ? base : { ...base, tables };
  const coder = exportedCoder(candidate, setup);
  const declared = candidate.create().costs!(setup, 1000, train)!;
  const folder = mkdtempSync(join(tmpdir(), 'bitassay-sizes-'));
  try {
    for (const [file, code] of cFiles(coder, setup, { name: 'sized', provenance: [''] }))
      writeFileSync(join(folder, file), code);
    const end = (which: 'encoder' | 'decoder'): End => ({
      measured: measureC(folder, `sized_${which.replace(/r$/, '')}.c`)!,
      declared: declared[which],
      ...tablesOf(coder[which]),
    });
    return { encoder: end('encoder'), decoder: end('decoder') };
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

/** How far a measured figure is off the declared one, as a part of that. */
const off = (measured: number, declared: number): number =>
  Math.abs(measured - declared) / declared;

const lengthsOf = ['link', 'sent', 'known'] as const;

const cases: [corpus: string, candidate: string][] = [
  ['events', 'huffman'],
  ['telemetry', 'huffman'],
  ['events', 'block-huffman:n=1'],
  ['events', 'block-huffman:n=2'],
  ['telemetry', 'block-huffman:n=2'],
  ['events', 'block-huffman:n=3'],
  ['events', 'rice'],
  ['events', 'golomb'],
  ['events', 'golomb:m=11'],
  ['events', 'exp-golomb'],
  ['events', 'arith:order=0,range=32'],
  ['telemetry', 'arith:order=0,position=24,range=32'],
  ['events', 'arith:order=1,range=32'],
  ['telemetry', 'arith:order=1,range=32'],
  ['events', 'arith:order=2,range=32'],
  ['events', 'arith:order=1,range=32,unseen=add:1/2'],
  ['telemetry', 'fields:auto,range=32'],
  ['telemetry', 'fields:range=32,map=dt:delta2/last+supply:linear/value'],
  ['mixed', 'fields:range=32,map=a:raw+b:delta/last'],
  ['mixed', 'fields:range=32,map=b:linear:a/at:a/first:a'],
  ['mixed', 'fields:range=32,map=c:linear:a:b+d:delta2/value'],
];

describe('what exported C takes', () => {
  it.each(cases)('on %s: %s', { timeout: 60_000 }, (corpus, text) => {
    const most = text.startsWith('arith:order=1,range=32') ? 0.1 : 0.15;
    for (const lengths of lengthsOf) {
      for (const { measured, declared, tableBytes, tables } of Object.values(
        endsOf(corpus, text, lengths),
      )) {
        expect(tableBytes).toBe(declared.flashBytes);
        // The compiler begins tables at multiples of up to 32 bytes.
        expect(measured.tableBytes).toBeGreaterThanOrEqual(tableBytes);
        expect(measured.tableBytes).toBeLessThanOrEqual(tableBytes + tables * BYTES_A_TABLE);
        expect(off(measured.codeBytes, declared.codeBytes)).toBeLessThan(most);
        expect(off(measured.stackBytes, declared.ramBytes)).toBeLessThan(most);
        expect(
          off(measured.codeBytes + measured.tableBytes, declared.codeBytes + declared.flashBytes),
        ).toBeLessThan(most);
      }
    }
  });

  it.each(lengthsOf)(
    'a Huffman decoder has less than 600 bytes of code under lengths %s',
    (lengths) => {
      for (const corpus of ['events', 'telemetry', 'alerts'])
        expect(endsOf(corpus, 'huffman', lengths).decoder.measured.codeBytes).toBeLessThan(600);
    },
  );
});
