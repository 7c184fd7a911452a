import { mkdtemp, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import seedrandom from 'seedrandom';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { parsePlan } from '../../src/corpus/plan.ts';
import { InputError } from '../../src/errors/errors.ts';
import { loadVariedData } from '../../src/harness/load-varied-data.ts';
import { corporaOfPlan, requestOf } from '../../src/harness/plan-request.ts';
import { rateOf } from '../../src/harness/rate-of.ts';
import { cellsOf, runAll } from '../../src/harness/run-all.ts';
import { runRecordSchema } from '../../src/harness/run-record.ts';

/** Bytes whose law drifts, so that which part trains is seen in the rate. */
const SIZE = 2400;
const next = seedrandom('variations');
const data = Uint8Array.from({ length: SIZE }, (_, i) => {
  const centre = 20 + Math.floor(i / 100);
  return centre + Math.floor(next() * 6);
});

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'variations-'));
  await writeFile(join(folder, 'x.bin'), data);
  await writeFile(
    join(folder, 'numbers.bin'),
    new Uint8Array(Uint16Array.from({ length: 600 }, (_, i) => i).buffer),
  );
});
afterAll(() => rm(folder, { recursive: true }));

const planText = (more: string, candidates = '[huffman, "arith:order=0"]') =>
  `plan: 1
corpora:
  a: {files: x.bin, symbols: bytes, messages: every=40}
candidates: ${candidates}
${more}
`;

/** Without timing, which these do not look at. */
async function request(more: string, candidates?: string) {
  const plan = parsePlan(planText(more, candidates), join(folder, 'p.yaml'));
  const { timing: _, ...rest } = await requestOf(plan);
  return rest;
}

const carried = async (more: string, candidates?: string) => {
  const { record } = await runAll(await request(more, candidates));
  return new Map(record.cells.map((cell) => [cell.id, cell.carried_bits]));
};

const messages = (bytes: Uint8Array, size = 40): Uint8Array[] =>
  Array.from({ length: Math.ceil(bytes.length / size) }, (_, i) =>
    bytes.subarray(i * size, (i + 1) * size),
  );

describe('cells of a plan that varies', () => {
  it('are all combinations, each once, and none that nothing changes', async () => {
    const { cells } = cellsOf(
      await request(
        'tables: [shipped, learned]\nvary: {train_share: [0.1, 1], message_symbols: [40, 80], align: [1, 8]}',
        '[fixed, "arith:order=0"]',
      ),
    );
    const fixed = 'a/fixed@none/message';
    const shipped = 'a/arith:order=0@shipped/message';
    const learned = 'a/arith:order=0@learned/message';
    expect(cells.map((cell) => cell.id)).toEqual([
      fixed,
      shipped,
      learned,
      `${fixed}+align=1`,
      `${shipped}+align=1`,
      `${learned}+align=1`,
      // Tables that are not trained have no share.
      `${shipped}+train_share=0.1`,
      `${shipped}+align=1+train_share=0.1`,
      `${fixed}+message_symbols=80`,
      `${shipped}+message_symbols=80`,
      `${learned}+message_symbols=80`,
      `${fixed}+align=1+message_symbols=80`,
      `${shipped}+align=1+message_symbols=80`,
      `${learned}+align=1+message_symbols=80`,
      `${shipped}+message_symbols=80+train_share=0.1`,
      `${shipped}+align=1+message_symbols=80+train_share=0.1`,
    ]);
    expect(new Set(cells.map((cell) => cell.id)).size).toBe(cells.length);
  });

  it('have a fold each, behind all else', async () => {
    const { cells } = cellsOf(
      await request(
        'tables: [primed]\nsplit: {folds: 2}\nvary: {train_share: [0.1], align: [1]}',
        '["arith:order=1"]',
      ),
    );
    const base = 'a/arith:order=1@primed/message';
    expect(cells.map((cell) => cell.id)).toEqual([
      `${base}+fold=1`,
      `${base}+align=1+fold=1`,
      `${base}+train_share=0.1+fold=1`,
      `${base}+align=1+train_share=0.1+fold=1`,
      `${base}+fold=2`,
      `${base}+align=1+fold=2`,
      `${base}+train_share=0.1+fold=2`,
      `${base}+align=1+train_share=0.1+fold=2`,
    ]);
  });

  it('are those of a plan that varies nothing, where every value is its own', async () => {
    const ids = async (more: string) => cellsOf(await request(more)).cells.map((cell) => cell.id);
    expect(await ids('vary: {train_share: [1], message_symbols: [40], align: [8]}')).toEqual(
      await ids(''),
    );
  });
});

describe('what variations carry', () => {
  it('is what a plan of that message size and alignment carries', async () => {
    const varied = await carried('vary: {message_symbols: [16, 80], align: [1]}');
    for (const size of [16, 80]) {
      const plan = parsePlan(
        planText('align: 1').replace('every=40', `every=${size}`),
        join(folder, 'p.yaml'),
      );
      const { timing: _, ...own } = await requestOf(plan);
      const { record } = await runAll(own);
      expect(record.cells.length).toBeGreaterThan(3);
      for (const cell of record.cells) {
        const id = `${cell.id}+align=1+message_symbols=${size}`;
        expect(varied.get(id), id).toBe(cell.carried_bits);
      }
    }
    const base = await carried('');
    for (const [id, bits] of base) expect(varied.get(id), id).toBe(bits);
  });

  it('under a share is what the end of the train part gives, by hand', async () => {
    const varied = await carried('tables: [shipped, primed]\nvary: {train_share: [0.1, 0.5]}');
    const test = messages(data.subarray(SIZE / 2));
    const train = messages(data.subarray(0, SIZE / 2));
    for (const [share, from] of [
      // Of 30 train messages the last 3 and the last 15.
      [0.1, 27],
      [0.5, 15],
    ]) {
      for (const tables of ['shipped', 'primed'] as const) {
        const id = `a/arith:order=0@${tables}/message+train_share=${share}`;
        const hand = await rateOf(test, 'arith:order=0', { train: train.slice(from), tables });
        expect(varied.get(id), id).toBe(hand.carriedBits);
      }
    }
    // The law drifts, so the share is seen in the rate.
    expect(varied.get('a/huffman@shipped/message')).not.toBe(
      varied.get('a/huffman@shipped/message+train_share=0.1'),
    );
  });

  it('in a fold is what its block gives with all others, by hand', async () => {
    const varied = await carried('tables: [shipped, primed]\nsplit: {folds: 3}');
    const all = messages(data);
    for (const fold of [1, 2, 3]) {
      const [from, to] = [(fold - 1) * 20, fold * 20];
      const train = [...all.slice(to), ...all.slice(0, from)];
      for (const tables of ['shipped', 'primed'] as const) {
        const id = `a/arith:order=0@${tables}/message+fold=${fold}`;
        const hand = await rateOf(all.slice(from, to), 'arith:order=0', { train, tables });
        expect(varied.get(id), id).toBe(hand.carriedBits);
      }
    }
  });
});

describe('data of a plan that varies', () => {
  it('never train on what they test', async () => {
    // Symbols are numbered, so each tells its position.
    const spec = { name: 'n', files: ['numbers.bin'], symbols: 'u16le', messages: 'every=10' };
    const vary = { messageSymbols: [4, 25], trainShares: [0.1, 0.7] };
    for (const by of ['message', 'block'] as const) {
      for (const folds of [undefined, 3]) {
        const rule = { by, order: 'in_time' as const, train: 0.5, ...(folds && { folds }) };
        const all = await loadVariedData(spec, folder, rule, vary);
        expect(all).toHaveLength(3 * 3 * (folds ?? 1));
        expect(new Set(all.map(({ key }) => key)).size).toBe(all.length);
        const base = new Map(all.map((one) => [one.key, one]));
        for (const one of all) {
          const held = new Set(one.test.symbols);
          expect(one.train!.symbols.length).toBeGreaterThan(0);
          expect([...one.train!.symbols].some((position) => held.has(position))).toBe(false);
          if (one.vary?.trainShare === undefined) continue;
          const whole = base.get(one.key.replace(/\+train_share=[\d.]+/, ''))!;
          expect(one.test).toBe(whole.test);
          // Memory is shared, and what comes right before the test part is kept.
          expect(one.train!.symbols.buffer).toBe(whole.train!.symbols.buffer);
          expect(one.train!.symbols.at(-1)).toBe(whole.train!.symbols.at(-1));
          expect(one.train!.symbols.length).toBeLessThan(whole.train!.symbols.length);
        }
      }
    }
  });

  it('of one corpus are one entry of the record, with the floors of each message size', async () => {
    const asked = await request('vary: {train_share: [0.5], message_symbols: [80]}');
    const { record, messages: pairs } = await runAll(asked);
    expect(runRecordSchema.safeParse(record).error?.issues).toBeUndefined();
    expect(record.corpora).toHaveLength(1);
    expect(record.corpora[0]).toMatchObject({ symbol_count: 1200, message_symbols: 40 });
    expect(record.corpora[0].folds).toBeUndefined();
    // A share of the train part codes the same test part.
    expect(record.entropy.map((one) => one.data)).toEqual([undefined, 'a+message_symbols=80']);
    const { cells } = cellsOf(asked);
    expect(record.cells.map((cell) => cell.id).sort()).toEqual(cells.map((cell) => cell.id).sort());
    for (const cell of record.cells) {
      expect(cell.verified, cell.failure).toBe(true);
      expect(pairs.get(cell.id)?.bits.length).toBe(cell.message_count);
      expect(cell.messages_as).toBe(
        cell.vary?.message_symbols === undefined ? 'every=40' : 'every=80',
      );
    }
    const both = record.cells.find((cell) => cell.vary?.message_symbols && cell.vary.train_share);
    expect(both?.vary).toEqual({ message_symbols: 80, train_share: 0.5 });
  });

  it('in folds are counted together', async () => {
    const { record } = await runAll(await request('tables: [shipped]\nsplit: {folds: 4}'));
    expect(runRecordSchema.safeParse(record).error?.issues).toBeUndefined();
    expect(record.corpora).toHaveLength(1);
    // All 60 messages are tested once; each fold trains on three quarters.
    expect(record.corpora[0]).toMatchObject({
      symbol_count: SIZE,
      message_count: 60,
      train_symbol_count: (SIZE * 3) / 4,
      folds: 4,
    });
    expect(record.plan.split).toBe(
      'each of 4 contiguous blocks by message in turn, trained on the others',
    );
    expect(record.entropy.map((one) => one.data)).toEqual([1, 2, 3, 4].map((i) => `a+fold=${i}`));
    expect(record.ageing).toBeUndefined();
  });

  it('are without what is varied for an entropy report', async () => {
    const plan = (more: string) => parsePlan(planText(more), join(folder, 'p.yaml'));
    const [own] = await corporaOfPlan(plan('vary: {message_symbols: [80]}'));
    expect([own.key, own.test.symbols.length]).toEqual(['a', SIZE / 2]);
    const [all, ...others] = await corporaOfPlan(plan('split: {folds: 4}'));
    expect([all.key, all.test.symbols.length, others.length]).toEqual(['a', SIZE, 0]);
  });

  it('are timed only where they are the plan’s own, or its first fold', async () => {
    const asked = await request(
      'tables: [shipped]\nsplit: {folds: 2}\nvary: {align: [1]}',
      '[huffman]',
    );
    const { record } = await runAll({ ...asked, timing: { repeats: 1 } });
    expect(record.cells.filter((cell) => cell.encode !== undefined).map((cell) => cell.id)).toEqual(
      ['a/huffman@shipped/message+fold=1'],
    );
  });
});

describe('a part of the cells', () => {
  it('has the entropies of what it codes, and no others', async () => {
    const asked = await request('tables: [shipped]\nsplit: {folds: 4}');
    const { record } = await runAll({ ...asked, only: '+fold=3' });
    expect(record.entropy.map((one) => one.data)).toEqual(['a+fold=3']);
    expect(record.cells.length).toBeGreaterThan(0);
  });
});

describe('a plan that varies what its data or candidates do not allow', () => {
  const refusal = async (more: string, candidates?: string) => {
    try {
      await request(more, candidates);
    } catch (error) {
      if (error instanceof InputError) return error;
    }
    return expect.unreachable();
  };

  it.each([
    [
      'vary: {train_share: [0.01]}',
      undefined,
      'vary.train_share',
      '0.01 of 30 messages, messages: every=40',
    ],
    ['split: {folds: 70}', undefined, 'split.folds', '60 messages'],
    [
      'vary: {train_share: [0.5]}',
      '[deflate]',
      'vary.train_share',
      'tables: shipped, sent, learned',
    ],
    ['split: {folds: 3}', '[fixed]', 'split.folds', 'tables: shipped, sent, learned'],
  ])('%s with %s is refused', async (more, candidates, key, got) => {
    const error = await refusal(more, candidates);
    expect(error.where).toMatchObject({ key, got, line: 5, file: join(folder, 'p.yaml') });
  });

  it('is refused before its data are read where it asks for more than anybody means', async () => {
    const sizes = Array.from({ length: 30 }, (_, i) => i + 1).join(', ');
    const error = await refusal(`split: {folds: 34}\nvary: {message_symbols: [${sizes}]}`);
    // 31 × 34 = 1054, the plan's own size among them.
    expect(error.message).toContain('1054 times');
    expect(error.where).toMatchObject({ key: 'vary', line: 6 });
  });
});
