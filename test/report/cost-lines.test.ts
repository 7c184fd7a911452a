import { describe, expect, it } from 'vitest';
import { compareRun } from '../../src/compare/compare-run.ts';
import { type CellRecord, type RunRecord, runRecordSchema } from '../../src/harness/run-record.ts';
import { delayNote, deviceNote, operationsNote, someGrow } from '../../src/report/cost-lines.ts';
import { runScreen } from '../../src/report/run-screen.ts';
import { linesRecord } from './sample-record.ts';

const end = (flash_bytes: number, ram_bytes: number) => ({
  flash_bytes,
  ram_bytes,
  code_bytes: 400,
});

/** The record with costs for all but references, and the plan's small end if given. */
function recordWith(device?: 'encoder' | 'decoder'): RunRecord {
  const cells = linesRecord.cells.map(
    (cell): CellRecord =>
      cell.reference
        ? cell
        : { ...cell, encoder: end(12_345, 678), decoder: end(23_456, 789), decode_delay_bytes: 6 },
  );
  const plan = { ...linesRecord.plan, ...(device === undefined ? {} : { product: { device } }) };
  return { ...linesRecord, plan, cells };
}

const screen = (record: RunRecord, columns: number) =>
  runScreen(record, {
    columns,
    compared: compareRun(record, new Map()),
    next: 'bitassay entropy plan.yaml',
  });

describe('flash and RAM on the screen', () => {
  it('are those of the end that the plan names', () => {
    const encoder = screen(recordWith('encoder'), 120);
    expect(encoder).toContain('12 345  678');
    expect(encoder).not.toContain('23 456');
    expect(encoder).toMatch(/ encoder +.*\n.* flash {2}RAM /);
    const decoder = screen(recordWith('decoder'), 120);
    expect(decoder).toContain('23 456  789');
    expect(decoder).not.toContain('12 345');
  });

  it('say what they hold', () => {
    const text = screen(recordWith('decoder'), 120).replace(/\s+/g, ' ');
    const record = recordWith('decoder');
    expect(text).toContain(deviceNote('decoder', someGrow(record.cells)));
  });

  it('are dropped where the plan names no end: the screen is as without costs', () => {
    expect(screen(recordWith(), 100)).toBe(screen(linesRecord, 100));
  });

  it.each([100, 80, 60])('keep to %i columns', (columns) => {
    for (const line of screen(recordWith('encoder'), columns).split('\n'))
      expect([...line].length, line).toBeLessThanOrEqual(columns);
  });

  it('move to a table of their own before letters get too little room, the speeds first', () => {
    const headsOf = (columns: number): [first: string, second: string] => {
      const heads = screen(recordWith('encoder'), columns)
        .split('\n')
        .filter((line) => line.startsWith('  candidate'));
      return [heads[0], heads[1] ?? ''];
    };
    const inFirst: string[] = [];
    for (let columns = 130; columns >= 60; columns--) {
      const [first, second] = headsOf(columns);
      expect(`${first} ${second}`, `at ${columns} columns`).toMatch(/ flash /);
      const shown =
        `${/ flash /.test(first) ? 'flash' : ''} ${/ encode /.test(first) ? 'speed' : ''}`.trim();
      if (inFirst.at(-1) !== shown) inFirst.push(shown);
    }
    expect(inFirst).toEqual(['flash speed', 'flash', '']);
  });

  it('lie in a record that keeps the schema', () => {
    expect(runRecordSchema.safeParse(recordWith('encoder')).error?.issues).toBeUndefined();
  });
});

describe('what is said of models that grow', () => {
  const [first] = linesRecord.cells;
  const cell = (more: Partial<CellRecord>): CellRecord => ({ ...first, ...more });

  it('stands where RAM is told of one', () => {
    const grows = cell({ coder: 'arith', tables: 'learned', decoder: end(0, 5000) });
    expect(someGrow([grows])).toBe(true);
    expect(someGrow([cell({ coder: 'arith', tables: 'shipped', decoder: end(1, 2) })])).toBe(false);
    expect(someGrow([cell({ coder: 'rice', tables: 'learned', decoder: end(1, 2) })])).toBe(false);
    const { decoder: _, ...untold } = grows;
    expect(someGrow([untold])).toBe(false);
    expect(deviceNote('decoder', true)).toContain('others can need more');
    expect(deviceNote('decoder', false)).not.toContain('grows');
  });
});

describe('the note of operations', () => {
  const [first] = linesRecord.cells;
  const kind = (mean: number, worst: number) => ({ total: 1000 * mean, mean, worst });
  const operations = {
    multiplies: kind(2.3456, 4),
    divides: kind(1, 1),
    table_reads: kind(17.06, 33),
    branches: kind(120.4, 1500),
  };
  const cell: CellRecord = {
    ...first,
    candidate: 'arith:order=1',
    tables: 'shipped',
    encoder: { ...end(1, 2), operations },
  };

  it('gives means and the worst of the end that is asked for', () => {
    const text = operationsNote(cell, 'encoder', 'byte')!;
    expect(text).toContain(
      '2.35 multiplies (4), 1 divides (1), 17.1 table reads (33), 120 branches on data (1 500).',
    );
    expect(text).toMatch(/^Operations of the encoder of arith:order=1/);
    expect(text).not.toContain('without what its tables take');
    expect(operationsNote({ ...cell, tables: 'sent' }, 'encoder', 'byte')).toContain(
      'without what its tables take',
    );
    expect(operationsNote({ ...cell, coder: 'fields' }, 'encoder', 'byte')).toContain(
      'the most of one record: ',
    );
    expect(operationsNote(cell, 'decoder', 'byte')).toBeUndefined();
  });
});

describe('the note of decoders that need the whole message', () => {
  const corpus = linesRecord.corpora[0];
  const [first] = linesRecord.cells;
  const cell = (candidate: string, more: Partial<CellRecord>): CellRecord => ({
    ...first,
    candidate,
    ...more,
  });
  const cells = [
    cell('huffman', { decode_delay_bytes: 4 }),
    cell('deflate', { holds_whole_message: true }),
    cell('huffman:stored=on', { holds_whole_message: true }),
    cell('deflate', { holds_whole_message: true, reset: 'file' }),
    cell('brotli', { holds_whole_message: true, verified: false }),
  ];

  it.each(['fill=192,unit=24', 'records=8'])('names each once under %s', (messages_as) => {
    expect(delayNote(cells, { ...corpus, messages_as })).toBe(
      'Need the whole message before their first symbol can be decoded: deflate, huffman:stored=on.',
    );
  });

  it('is left out where messages are no packets, or none needs it', () => {
    expect(delayNote(cells, { ...corpus, messages_as: 'lines' })).toBeUndefined();
    expect(delayNote(cells.slice(0, 1), { ...corpus, messages_as: 'records=8' })).toBeUndefined();
  });
});
