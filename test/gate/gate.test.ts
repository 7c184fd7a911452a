import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { baselineOf, baselineSchema } from '../../src/gate/baseline.ts';
import { baselineText, parseBaseline } from '../../src/gate/baseline-file.ts';
import { type Gate, gateRun } from '../../src/gate/gate.ts';
import type { CellRecord, RunRecord } from '../../src/harness/run-record.ts';
import { linesRecord, wholeRecord } from '../report/sample-record.ts';
import { cellOf, hashOf, recordOf, timesOf } from './made-up.ts';

const IDS = [
  'a/huffman@sent/message',
  'a/arith:order=1@learned/message',
  'b/rice:k=2@none/message',
];

const run = (more: Partial<RunRecord> = {}) =>
  recordOf(
    IDS.map((id, i) => cellOf(id, 1000 + i)),
    more,
  );

/** Through the file, as a build does it. */
function gated(was: RunRecord, now: RunRecord, allow?: Parameters<typeof gateRun>[2]): Gate {
  return gateRun(parseBaseline(baselineText(baselineOf(was)), 'kept.json'), now, allow);
}

/** Figures of one verdict, as `cell figure`. */
const figures = ({ cells }: Gate, verdict: string) =>
  cells.flatMap(({ id, checks }) =>
    checks.filter((check) => check.verdict === verdict).map(({ figure }) => `${id} ${figure}`),
  );

const withCell = (record: RunRecord, index: number, more: Partial<CellRecord>): RunRecord => ({
  ...record,
  cells: record.cells.map((cell, i) => (i === index ? { ...cell, ...more } : cell)),
});

describe('a run against itself', () => {
  it.each([
    ['made up', run()],
    ['of lines', linesRecord],
    ['of packets', wholeRecord],
    ['without cells', recordOf([])],
  ])('holds: %s', (_, record) => {
    const gate = gated(record, record);
    expect(gate.verdict).toBe('held');
    expect(gate.unpaired).toEqual([]);
    expect(gate.cells).toHaveLength(record.cells.length);
    expect(figures(gate, 'lost')).toEqual([]);
    expect(figures(gate, 'better')).toEqual([]);
    for (const cell of gate.cells) expect([cell.lines, cell.files]).toEqual([[], []]);
  });
});

describe('bits', () => {
  it('are lost by any bit more in any cell, where nothing is allowed', () => {
    fc.assert(
      fc.property(fc.nat(IDS.length - 1), fc.integer({ min: 1, max: 1e9 }), (index, more) => {
        const before = run();
        const carried_bits = before.cells[index].carried_bits! + more;
        const gate = gated(before, withCell(before, index, { carried_bits }));
        expect(gate.verdict).toBe('lost');
        expect(figures(gate, 'lost')).toEqual([`${IDS[index]} carried_bits`]);
      }),
    );
  });

  it('may grow up to what is allowed, by bit and by share, and no bit more', () => {
    const before = run();
    // 1 % of the 8000 bits of the first cell is 80.
    for (const [total, more, verdict] of [
      [12, 11, 'held'],
      [12, 12, 'held'],
      [12, 13, 'lost'],
      ['1%', 79, 'held'],
      ['1%', 80, 'held'],
      ['1%', 81, 'lost'],
    ] as const) {
      const after = withCell(before, 0, { carried_bits: 8000 + more });
      expect(gated(before, after, { total, each_file: 0 }).verdict, `${total} ${more}`).toBe(
        verdict,
      );
    }
  });

  it('are gated by what the plan of the run says', () => {
    const before = run();
    const after = withCell(before, 0, { carried_bits: 8012 });
    const plan = { ...after.plan, gate: { allow: { total: 12 } } };
    expect(gated(before, after).verdict).toBe('lost');
    expect(gated(before, { ...after, plan }).verdict).toBe('held');
  });

  it('that are saved are better, and do not make up for what another cell lost', () => {
    const before = run();
    const saved = withCell(before, 0, { carried_bits: 7999 });
    expect(gated(before, saved).verdict).toBe('better');
    const mixed = withCell(saved, 1, { carried_bits: 8009 });
    expect(gated(before, mixed).verdict).toBe('lost');
  });

  it('of references are never gated', () => {
    const reference = cellOf('a/deflate@none/message', 900, { reference: true });
    const before = recordOf([...run().cells, reference]);
    const after = withCell(before, 3, { carried_bits: 99_999 });
    expect(gated(before, after).verdict).toBe('held');
    const failed = withCell(before, 3, { verified: false, failure: 'no output' });
    expect(figures(gated(before, failed), 'lost')).toEqual(['a/deflate@none/message verified']);
  });
});

describe('the account', () => {
  const account = { floor: 400, opening: 0, structure: 7000, learning: 100, tables: 420, ends: 80 };

  it('names the lines that grew, the most grown first, with what a table takes', () => {
    const before = recordOf([cellOf(IDS[0], 1000, { account })]);
    const after = recordOf([
      cellOf(IDS[0], 1051, { account: { ...account, tables: 832, ends: 92, structure: 6984 } }),
    ]);
    // 10 messages under reset message: 10 tables.
    expect(gated(before, after).cells[0].lines).toEqual([
      { line: 'tables', was: 420, now: 832, per: { unit: 'table', was: 42, now: 83.2 } },
      { line: 'ends', was: 80, now: 92, per: { unit: 'message', was: 8, now: 9.2 } },
      { line: 'structure', was: 7000, now: 6984 },
    ]);
  });

  it('puts structure and learning together where the other does not part them', () => {
    const before = recordOf([cellOf(IDS[0], 1000, { account })]);
    const { structure: _, learning: __, ...rest } = account;
    const after = recordOf([cellOf(IDS[0], 1001, { account: { ...rest, model: 7108 } })]);
    expect(gated(before, after).cells[0].lines).toEqual([{ line: 'model', was: 7100, now: 7108 }]);
  });

  it('says by how much the estimate of the floor moved', () => {
    const before = recordOf([cellOf(IDS[0], 1000, { account })]);
    const after = recordOf([
      cellOf(IDS[0], 1000, { account: { ...account, floor: 390, structure: 7010 } }),
    ]);
    const [cell] = gated(before, after).cells;
    expect(cell.floorMoved).toBe(-10);
    expect(cell.verdict).toBe('held');
  });
});

describe('files', () => {
  const files = (bytesOf: (i: number) => number) =>
    Array.from({ length: 40 }, (_, i) => ({
      sha256: hashOf(i),
      symbol_count: 1000,
      coded_bytes: bytesOf(i),
    }));
  const cellWith = (list: NonNullable<CellRecord['files']>) => {
    const bytes = list.reduce((sum, file) => sum + file.coded_bytes, 0);
    return recordOf([cellOf(IDS[1], bytes, { files: list })]);
  };

  it('40 of them, one 0.6 % worse and 39 a little better: lost under 0.5 % of each, and the file is named', () => {
    const before = cellWith(files(() => 1000));
    const after = cellWith(files((i) => (i === 17 ? 1006 : 999)));
    const allow = { total: 0, each_file: '0.5%' };
    const gate = gated(before, after, allow);
    expect(gate.verdict).toBe('lost');
    expect(figures(gate, 'lost')).toEqual([`${IDS[1]} files`]);
    expect(gate.cells[0].files[0]).toEqual({
      file: hashOf(17),
      was: 8000,
      now: 8048,
      lost: true,
    });
    expect(gate.cells[0].files.filter((file) => file.lost)).toHaveLength(1);
    expect(gated(before, after, { total: 0, each_file: '0.6%' }).verdict).toBe('better');
  });

  it('are listed by their own growth, the worst first', () => {
    const before = cellWith(files((i) => 100 + i));
    const after = cellWith(files((i) => 100 + i + (i % 3)));
    const [{ files: found }] = gated(before, after).cells;
    const shares = found.map(({ was, now }) => now / was);
    expect(found).toHaveLength(26);
    expect(shares).toEqual([...shares].sort((a, b) => b - a));
    expect(found[0].file).toBe(hashOf(2));
  });

  it('of the same content are told apart by their place', () => {
    const twin = (second: number) => [
      { sha256: hashOf(1), symbol_count: 500, coded_bytes: 500 },
      { sha256: hashOf(1), symbol_count: 500, coded_bytes: second },
    ];
    const [cell] = gated(cellWith(twin(500)), cellWith(twin(501))).cells;
    expect(cell.files).toEqual([{ file: `${hashOf(1)}#2`, was: 4000, now: 4008, lost: true }]);
  });

  it('of a corpus with other files are compared where each is coded by itself, and the rest is listed', () => {
    const before = cellWith(files(() => 1000).slice(0, 3));
    const more = cellWith(files((i) => (i === 1 ? 1001 : 1000)).slice(1, 5));
    const after = { ...more, corpora: [{ ...more.corpora[0], sha256: hashOf(99) }] };
    const gate = gated(before, after);
    const [cell] = gate.cells;
    expect(cell).toMatchObject({ filesOnly: true, was: 16_000, now: 16_008, verdict: 'lost' });
    expect(cell.unpairedFiles).toEqual([
      { file: hashOf(0), found: 'baseline' },
      { file: hashOf(3), found: 'run' },
      { file: hashOf(4), found: 'run' },
    ]);
    const trained = (record: RunRecord) =>
      withCell(record, 0, { id: 'a/arith@shipped/message', tables: 'shipped' });
    expect(gated(trained(before), trained(after)).unpaired).toEqual([
      { id: 'a/arith@shipped/message', found: 'both', reason: 'the files of a changed' },
    ]);
  });
});

describe('verification', () => {
  it('is lost by a cell that fails now, whatever is allowed', () => {
    const before = run();
    const after = withCell(before, 1, { verified: false, failure: 'symbol 7 differs' });
    const gate = gated(before, after, { total: '100%', each_file: '100%' });
    expect(figures(gate, 'lost')).toEqual([`${IDS[1]} verified`]);
    expect(gate.cells.find(({ id }) => id === IDS[1])?.checks).toEqual([
      { figure: 'verified', verdict: 'lost', was: true, now: false, reason: 'symbol 7 differs' },
    ]);
  });

  it('cannot be lost by a cell that failed before, and is better where it came back', () => {
    const failing = withCell(run(), 1, { verified: false, failure: 'dead' });
    const still = gated(failing, failing);
    expect(still.verdict).toBe('held');
    expect(figures(still, 'not compared')).toEqual([`${IDS[1]} verified`]);
    expect(gated(failing, run()).verdict).toBe('better');
  });
});

describe('sizes and operations', () => {
  const operation = (total: number, worst: number) => ({ total, mean: total / 1000, worst });
  const end = (flash: number, worst: number) => ({
    flash_bytes: flash,
    ram_bytes: 64,
    operations: {
      multiplies: operation(1000, 1),
      divides: operation(0, 0),
      table_reads: operation(3000, worst),
      branches: operation(2000, 2),
    },
  });
  const withEnds = (flash: number, worst: number) =>
    recordOf([cellOf(IDS[0], 1000, { encoder: end(256, 3), decoder: end(flash, worst) })]);

  it('are exact', () => {
    const before = withEnds(512, 5);
    expect(gated(before, before).verdict).toBe('held');
    expect(figures(gated(before, withEnds(513, 5)), 'lost')).toEqual([
      `${IDS[0]} decoder.flash_bytes`,
    ]);
    expect(figures(gated(before, withEnds(512, 6)), 'lost')).toEqual([
      `${IDS[0]} decoder.table_reads_worst`,
    ]);
    expect(gated(before, withEnds(511, 5)).verdict).toBe('better');
  });

  it('that a coder does not tell any more are not compared', () => {
    const before = withEnds(512, 5);
    const silent = recordOf([cellOf(IDS[0], 1000)]);
    const gate = gated(before, silent);
    expect(gate.verdict).toBe('held');
    expect(figures(gate, 'not compared')).toContain(`${IDS[0]} decoder.flash_bytes`);
  });
});

describe('speeds', () => {
  const timed = { pacer: 'deflate-huffman', symbol_count: 1000, message_count: 10 };
  const withSpeed = (multiple: number, more: Partial<RunRecord> = {}, unsteady = false) => {
    const times = { ...timesOf(multiple), ...(unsteady ? { unsteady: true as const } : {}) };
    return recordOf([cellOf(IDS[0], 1000, { timed, encode: timesOf(1), decode: times })], more);
  };

  it('a clock that is 1.2 times slower is lost, 1 % is alike, and a faster one asks for nothing', () => {
    expect(figures(gated(withSpeed(1), withSpeed(1.2)), 'lost')).toEqual([
      `${IDS[0]} decode.speed`,
    ]);
    expect(gated(withSpeed(1), withSpeed(1.01)).verdict).toBe('held');
    const faster = gated(withSpeed(1.2), withSpeed(1));
    expect(faster.verdict).toBe('held');
    expect(figures(faster, 'better')).toEqual([`${IDS[0]} decode.speed`]);
  });

  it('are not compared over classes of machines, nor without times', () => {
    const other = { environment: { ...linesRecord.environment, class: 'ffffffffffff' } };
    const gate = gated(withSpeed(1), withSpeed(1.2, other));
    expect(gate.verdict).toBe('held');
    const check = gate.cells[0].checks.find(({ figure }) => figure === 'decode.speed');
    expect(check?.reason).toContain('machines of different classes');
    const untimed = gated(withSpeed(1), recordOf([cellOf(IDS[0], 1000)]));
    expect(figures(untimed, 'not compared')).toEqual([
      `${IDS[0]} encode.speed`,
      `${IDS[0]} decode.speed`,
    ]);
  });

  it('taken on an uneven machine fail no build, and are named', () => {
    const gate = gated(withSpeed(1), withSpeed(1.2, {}, true));
    expect(gate.verdict).toBe('held');
    expect(figures(gate, 'open')).toEqual([`${IDS[0]} decode.speed`]);
  });
});

describe('what cannot be paired', () => {
  it('is listed with its reason and fails nothing', () => {
    const before = run();
    const after = recordOf([...before.cells.slice(1), cellOf('a/tunstall@shipped/message', 1)]);
    const gate = gated(before, after);
    expect(gate.verdict).toBe('held');
    expect(gate.unpaired).toEqual([
      { id: IDS[0], found: 'baseline', reason: 'not in this run' },
      { id: 'a/tunstall@shipped/message', found: 'run', reason: 'not in the baseline' },
    ]);
  });

  it.each([
    [
      'messages',
      (r: RunRecord) => changedCorpus(r, { messages_as: 'records=8' }),
      /^messages records=8, was/,
    ],
    ['lengths', (r: RunRecord) => changedCorpus(r, { lengths: 'known' }), /^lengths known, was/],
    [
      'symbols',
      (r: RunRecord) => changedCorpus(r, { symbols_as: 'nibbles' }),
      /^symbols nibbles, was/,
    ],
    ['align', (r: RunRecord) => ({ ...r, plan: { ...r.plan, align: 32 } }), /^align 32, was 8/],
    [
      'split',
      (r: RunRecord) => ({ ...r, plan: { ...r.plan, split: 'other' } }),
      /^split other, was/,
    ],
  ])('has another %s', (_, change, reason) => {
    const before = recordOf([cellOf(IDS[0], 1000)]);
    const gate = gated(before, change(before));
    expect(gate.cells).toEqual([]);
    expect(gate.unpaired).toEqual([
      { id: IDS[0], found: 'both', reason: expect.stringMatching(reason) },
    ]);
  });

  it('codes another number of symbols of the same files', () => {
    const before = recordOf([cellOf(IDS[0], 1000)]);
    const gate = gated(before, withCell(before, 0, { symbol_count: 999 }));
    expect(gate.unpaired[0].reason).toBe('symbols coded 999, was 1000');
  });
});

function changedCorpus(record: RunRecord, more: Partial<RunRecord['corpora'][number]>): RunRecord {
  return { ...record, corpora: record.corpora.map((corpus) => ({ ...corpus, ...more })) };
}

describe('the baseline', () => {
  it('is sorted, and the same whatever the order of the cells', () => {
    const { cells } = run();
    const shuffled = recordOf([cells[2], cells[0], cells[1]]);
    const text = baselineText(baselineOf(recordOf(cells)));
    expect(baselineText(baselineOf({ ...shuffled, corpora: run().corpora }))).toBe(text);
    const ids = [...text.matchAll(/^ {2}"([^"]*@[^"]*)": \{$/gm)].map(([, id]) => id);
    expect(ids).toEqual([...IDS].sort());
  });

  it('is JSON of its own schema with one figure a line', () => {
    const text = baselineText(baselineOf(linesRecord));
    expect(baselineSchema.parse(JSON.parse(text))).toEqual(baselineOf(linesRecord));
    for (const line of text.split('\n')) {
      const figures = [...line.matchAll(/"\w+": (?=[-\d"tf])/g)].length;
      expect(figures, line).toBeLessThanOrEqual(line.includes('"symbols"') ? 2 : 1);
    }
  });

  it('changes in one line for one figure', () => {
    const before = baselineText(baselineOf(run())).split('\n');
    const after = baselineText(baselineOf(withCell(run(), 1, { carried_bits: 12_345 }))).split(
      '\n',
    );
    expect(after).toHaveLength(before.length);
    expect(after.filter((line, i) => line !== before[i])).toEqual(['   "carried_bits": 12345,']);
  });

  it.each([
    ['text', 'no json', /not JSON/, undefined],
    ['a cut file', baselineText(baselineOf(run())).slice(0, 300), /not JSON/, undefined],
    [
      'a conflict',
      baselineText(baselineOf(run())).replace(/\n/, '\n<<<<<<< ours\n'),
      /not JSON/,
      2,
    ],
    [
      'a wrong value',
      baselineText(baselineOf(run())).replace('"baseline": 1', '"baseline": 2'),
      /no baseline that this version reads/,
      2,
    ],
    ['another file', '[]', /no baseline that this version reads/, undefined],
  ])('that is %s is refused, with the line where there is one', (_, text, message, line) => {
    const read = () => parseBaseline(text, 'kept.json');
    expect(read).toThrow(message);
    try {
      read();
    } catch (error) {
      expect(error).toMatchObject({ where: { file: 'kept.json' } });
      if (line !== undefined) expect(error).toMatchObject({ where: { line } });
    }
  });
});
