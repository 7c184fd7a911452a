/** `fields` exported, for every type, transform and context, to the bit. */
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
import { expectation, type Proof, prove } from '../../src/export/prove.ts';
import { buildC } from '../../src/export/run-c.ts';
import { loadModule } from '../../src/export/run-ts.ts';
import { tsFile } from '../../src/export/ts-file.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { parseRecordField, type RecordShape } from '../../src/symbols/record.ts';
import { RecordLayout } from '../../src/symbols/record-layout.ts';
import type { SymbolSequence } from '../../src/symbols/sequence.ts';

const naming = { name: 'reefer', provenance: ['Made by a test.'] };

const recordOf = (bytes: number, fields: Readonly<Record<string, string>>): RecordShape => ({
  bytes,
  fields: Object.entries(fields).map(([name, type]) => parseRecordField(name, type, bytes)),
});

/** Records whose bytes drift, so that predictions have something to find; now and then any bytes at all. */
function driftingMessages(bytes: number, count: number, seed: number): SymbolSequence {
  const random = new SeededGenerator(seed);
  const last = new Uint8Array(bytes);
  const symbols: number[] = [];
  const messageEnds = Uint32Array.from({ length: count }, () => {
    const records = random.integer(0, 12);
    for (let i = 0; i < records; i++) {
      for (let at = 0; at < bytes; at++)
        last[at] =
          random.integer(0, 40) === 0
            ? random.integer(0, 255)
            : last[at] + random.integer(-2, 2) + (at > 0 ? last[at - 1] & 1 : 0);
      symbols.push(...last);
    }
    return symbols.length;
  });
  return { alphabetSize: 256, symbols: Uint8Array.from(symbols), messageEnds };
}

async function proven(
  text: string,
  record: RecordShape,
  lengths: Lengths,
  unitRecords: number,
): Promise<Proof[]> {
  const candidate = parseCandidate(text);
  const unitSymbols = record.bytes * unitRecords;
  const untrained: Setup = {
    policy: 'shipped',
    alphabetSize: 256,
    reset: 'message',
    lengths,
    align: lengths === 'sent' ? 16 : 8,
    record,
    unitSymbols,
  };
  const train = driftingMessages(unitSymbols, 150, 3);
  const others = [
    driftingMessages(unitSymbols, 150, 4),
    adversarialMessages(256, unitSymbols, 400, 5),
  ];
  const setup: Setup = { ...untrained, tables: trainOn(candidate, untrained, train)! };
  const coder = exportedCoder(candidate, setup);
  const folder = mkdtempSync(join(tmpdir(), 'bitassay-fields-'));
  try {
    const files = cFiles(coder, setup, naming);
    const module = join(folder, 'reefer.mjs');
    writeFileSync(module, tsFile(coder, setup, naming, false));
    const runners = [
      buildC(files, naming.name, setup, folder, { sanitize: false }),
      buildC(files, naming.name, setup, folder, { sanitize: true }),
      await loadModule(module),
    ];
    const expected = expectation(candidate, setup, [train, ...others], 600);
    return runners.map((run) => prove(expected, run));
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

const mixed = recordOf(24, {
  a: 'u8@0',
  b: 's8@1',
  c: 'u16le@2',
  d: 's16be@4',
  e: 'u32le@6',
  f: 's32be@10',
  g: 'u24be@14',
  h: 's24le@17',
  // Byte 22 is named by none, nor are the bits left over in 20 and 21.
  i: 'u3@20.1',
  j: 's9@20.5',
  k: 'u1@23.7',
});

const transforms = (transform: string, context: string) =>
  `fields:range=32,map=${['a', 'b', 'c', 'd', 'e', 'f', 'g', 'h', 'i', 'j', 'k', '@22']
    .map((name) => `${name}:${transform}${context}`)
    .join('+')}`;

const cases: [string, string, RecordShape, Lengths, number][] = [
  ['what auto finds', 'fields:auto,range=32', mixed, 'link', 1],
  ['raw', transforms('raw', ''), mixed, 'sent', 1],
  ['delta in the context of its own last', transforms('delta', '/last'), mixed, 'known', 1],
  ['delta2 in that of its last value', transforms('delta2', '/value'), mixed, 'link', 2],
  ['xor', transforms('xor', ''), mixed, 'link', 1],
  ['linear from itself alone', transforms('linear', '/last'), mixed, 'sent', 1],
  [
    'linear from others, before and behind, wide and narrow, and all contexts',
    'fields:range=32,map=a:linear:f:c/was:k+b:xor/at:a+c:linear:a:e/field:b+d:delta2/value/first:b' +
      '+e:linear:f:g:d/at:d+f:linear:e:h/was:g/first:e+g:linear:e/field:f+h:linear:f:j/value/first:c' +
      '+i:delta/at:a+j:linear:h/field:h/first:i+k:xor/was:a',
    mixed,
    'link',
    1,
  ],
  [
    'linear of narrow fields from wide ones',
    'fields:range=32,map=a:linear:c+b:linear:a/first:a+c:linear:a:b/value',
    recordOf(8, { a: 's16le@0', b: 'u16be@2', c: 's32le@4' }),
    'sent',
    1,
  ],
  ['one byte', 'fields:auto,range=32', recordOf(1, { a: 'u8@0' }), 'known', 1],
  ['one bit and what is left', 'fields:auto,range=32', recordOf(1, { a: 'u1@0.3' }), 'link', 3],
];

describe('fields exported', () => {
  it.each(cases)('%s', { timeout: 120_000 }, async (_, text, record, lengths, unitRecords) => {
    for (const proof of await proven(text, record, lengths, unitRecords)) {
      expect(proof.messages).toBe(700);
      expect(proof.damaged).toBe(600);
    }
  });
});

/** A record of random fields, and a random choice for each of its parts. */
function randomPlan(random: SeededGenerator): { record: RecordShape; map: string } {
  const below = (n: number) => random.integer(0, n - 1);
  const types = ['u8', 's8', 'u16le', 's16be', 'u24le', 's24be', 'u32be', 's32le', 'u3', 's7'];
  const fields: Record<string, string> = {};
  let bytes = 0;
  const count = 1 + below(5);
  for (let i = 0; i < count; i++) {
    const type = types[below(types.length)];
    // Now and then a byte that no field names.
    const at = bytes + (below(4) === 0 ? 1 : 0);
    const bits = /^[us](3|7)$/.test(type);
    fields[`f${i}`] = bits ? `${type}@${at}.${below(8)}` : `${type}@${at}`;
    bytes = at + (bits ? 2 : Math.ceil(Number(/\d+/.exec(type)![0]) / 8));
  }
  const record = recordOf(bytes, fields);
  const { names } = new RecordLayout(record);
  const choice = (part: number): string => {
    const others = names.filter((_, other) => other !== part);
    const earlier = names.slice(0, part);
    const one = (list: readonly string[]) => list[below(list.length)];
    const shuffled = others.toSorted(() => below(3) - 1);
    const transforms = ['raw', 'delta', 'xor', 'delta2', 'linear'];
    transforms.push(['linear', ...shuffled.slice(0, 1 + below(3))].join(':'));
    const contexts = ['', '/last', '/value'];
    if (others.length > 0) contexts.push(`/was:${one(others)}`, `/was:${one(others)}`);
    if (part > 0) contexts.push(`/field:${one(earlier)}`, `/at:${one(earlier)}`);
    const first = part > 0 && below(2) === 0 ? `/first:${one(earlier)}` : '';
    return one(transforms) + one(contexts) + first;
  };
  return { record, map: names.map((name, part) => `${name}:${choice(part)}`).join('+') };
}

describe('fields exported as TypeScript', () => {
  it('does the same for any record and any choices', { timeout: 60_000 }, async () => {
    const folder = mkdtempSync(join(tmpdir(), 'bitassay-fields-'));
    try {
      const random = new SeededGenerator(11);
      for (let i = 0; i < 60; i++) {
        const { record, map } = randomPlan(random);
        const candidate = parseCandidate(`fields:range=32,map=${map}`);
        const base: Setup = {
          policy: 'shipped',
          alphabetSize: 256,
          reset: 'message',
          lengths: (['link', 'sent', 'known'] as const)[i % 3],
          align: 8,
          record,
          unitSymbols: record.bytes,
        };
        // Wild records train every other plan: weights as large as they can be.
        const wild = adversarialMessages(256, record.bytes, 60, 12 + i);
        const calm = driftingMessages(record.bytes, 60, 13 + i);
        const setup: Setup = {
          ...base,
          tables: trainOn(candidate, base, i % 2 === 0 ? calm : wild)!,
        };
        const module = join(folder, `reefer${i}.mjs`);
        writeFileSync(module, tsFile(exportedCoder(candidate, setup), setup, naming, false));
        const expected = expectation(candidate, setup, [wild, calm], 100);
        expect(prove(expected, await loadModule(module)).messages, map).toBe(120);
      }
    } finally {
      rmSync(folder, { recursive: true, force: true });
    }
  });
});
