/** `try`, `run` and `entropy` as a user meets them: the built program, real files, exit codes and what is said. */
import { spawn, spawnSync } from 'node:child_process';
import {
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { brotliCompressSync, deflateRawSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { type RunRecord, runRecordSchema } from '../../src/harness/run-record.ts';

const main = fileURLToPath(new URL('../../dist/cli/main.js', import.meta.url));

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-main-'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function bitassay(...args: string[]): { code: number | null; out: string; err: string } {
  const { status, stdout, stderr } = spawnSync(process.execPath, [main, ...args], {
    cwd: folder,
    encoding: 'utf8',
    maxBuffer: 1 << 26,
  });
  return { code: status, out: stdout, err: stderr };
}

const put = (name: string, content: string | Uint8Array): string => {
  writeFileSync(join(folder, name), content);
  return name;
};

/** Log lines with a counter and a value that wanders, the same each time. */
function logText(lines: number): string {
  let supply = -1830;
  let text = '';
  for (let i = 0; i < lines; i++) {
    supply += ((i * 7919) % 13) - 6;
    text += `unit ${4700 + (i % 9)} supply ${supply} report ${i % 100}\n`;
  }
  return text;
}

const recordOf = (json: string): RunRecord => runRecordSchema.parse(JSON.parse(json));

/** All but what depends on the machine and the time. */
function integersOf(record: RunRecord): unknown {
  return {
    corpora: record.corpora,
    entropy: record.entropy,
    cells: record.cells.map(
      ({ encode: _e, decode: _d, table_build: _b, timed: _t, ...integers }) => integers,
    ),
  };
}

describe('try', () => {
  it('prints a record whose references have exactly the size that zlib gives', () => {
    const text = logText(400);
    const { code, out, err } = bitassay('try', put('log.txt', text), '--json');
    expect(err).toBe('');
    expect(code).toBe(0);
    const record = recordOf(out);
    expect(record.cells.length).toBeGreaterThan(10);
    expect(record.cells.every((cell) => cell.verified)).toBe(true);
    const bytesOf = (name: string) =>
      record.cells.find((cell) => cell.candidate === name)?.coded_bytes;
    expect(bytesOf('deflate')).toBe(deflateRawSync(text, { level: 9 }).length);
    expect(bytesOf('brotli')).toBe(brotliCompressSync(text).length);
    // One symbol count, an Elias delta word, beside eight bits a symbol: by hand from the length.
    expect(bytesOf('fixed')).toBe(text.length + 3);
  });

  it('sums each account to the carried bits, and each file to the whole', () => {
    put('a.log', logText(200));
    put('b.log', logText(150));
    const { out } = bitassay(
      'try',
      'a.log',
      'b.log',
      '--messages',
      'lines',
      '--reset',
      'message',
      'never',
      '--json',
    );
    for (const cell of recordOf(out).cells) {
      const sum = Object.values(cell.account!).reduce(
        (total: number, bits) => total + (bits ?? 0),
        0,
      );
      expect(Math.abs(sum - cell.carried_bits!), cell.id).toBeLessThan(0.01);
      const ofFiles = cell.files!.reduce((total, file) => total + file.coded_bytes, 0);
      expect(ofFiles, cell.id).toBe(cell.coded_bytes);
    }
  });

  it('shows a screen of at most 100 columns, without colour off a terminal', () => {
    const { code, out } = bitassay(
      'try',
      put('screen.txt', logText(300)),
      '--coder',
      'huffman',
      '--coder',
      'arith:order=1',
    );
    expect(code).toBe(0);
    expect(out.split('\n').every((line) => [...line].length <= 100)).toBe(true);
    expect(out).not.toContain('\u001b');
    expect(out).toMatch(/floor, an estimate/);
    expect(out.trimEnd().split('\n').at(-1)).toMatch(/^ Next: bitassay /);
  });

  it.each([
    ['bits', 2],
    ['nibbles', 16],
    ['u16le', 65536],
    ['codepoints', 28],
  ])('takes %s', (symbols, alphabetSize) => {
    const text = logText(200);
    put('even.txt', text.length % 2 === 0 ? text : `${text}\n`);
    const { code, out } = bitassay(
      'try',
      'even.txt',
      '--symbols',
      symbols,
      '--coder',
      'huffman',
      '--coder',
      'arith:order=0',
      '--json',
    );
    expect(code).toBe(0);
    const record = recordOf(out);
    const distinct = new Set(text).size;
    expect(record.corpora[0].alphabet_size).toBe(
      symbols === 'codepoints' ? distinct : alphabetSize,
    );
  });

  it('codes one value over and over in next to nothing', () => {
    const { code, out } = bitassay('try', put('zeros.bin', new Uint8Array(50_000)), '--json');
    expect(code).toBe(0);
    const huffman = recordOf(out).cells.find((cell) => cell.candidate === 'huffman')!;
    // One symbol needs no payload: the table and the count are all that is carried.
    expect(huffman.account!.rounding).toBe(0);
    expect(huffman.carried_bits!).toBeLessThan(100);
  });
});

const plan = (more = '') => `
plan: 1
corpora:
  log: {files: plan-log.txt, symbols: bytes, messages: lines}
candidates: [fixed, huffman, "block-huffman:n=2", "arith:order=0..2", deflate-preset]
tables: [shipped, sent, learned, primed]
reset: [message, file, never]
align: 8
timing: {repeats: 1}
${more}`;

describe('run', () => {
  it('leaves a record and message figures, the same integers each time', () => {
    put('plan-log.txt', logText(300));
    put('plan.yaml', plan());
    const first = bitassay('run', 'plan.yaml', '--json');
    expect(first.err).toContain('run.json');
    expect(first.code).toBe(0);
    const again = bitassay('run', 'plan.yaml', '--fresh', '-o', 'again.run', '--json');
    const record = recordOf(first.out);
    expect(integersOf(recordOf(again.out))).toEqual(integersOf(record));
    expect(recordOf(readFileSync(join(folder, 'plan.run/run.json'), 'utf8'))).toEqual(record);
    const files = readdirSync(join(folder, 'plan.run/messages'));
    expect(files.length).toBe(record.cells.length);
    for (const cell of record.cells) {
      expect(cell.verified, `${cell.id}: ${cell.failure}`).toBe(true);
      const name = files.find((file) =>
        file.startsWith(`${cell.id.replace(/[^A-Za-z0-9@=.-]+/g, '_')}.`),
      )!;
      const bytes = readFileSync(join(folder, 'plan.run/messages', name));
      let bits = 0;
      let symbols = 0;
      for (let at = 0; at < bytes.length; at += 16) {
        bits += bytes.readDoubleLE(at);
        symbols += bytes.readDoubleLE(at + 8);
      }
      expect(bits, cell.id).toBe(cell.carried_bits);
      expect(symbols, cell.id).toBe(cell.symbol_count);
    }
  }, 60_000);

  it('lists cells with a guess of the time', () => {
    put('plan-log.txt', logText(300));
    put('plan.yaml', plan());
    const { code, out } = bitassay('run', 'plan.yaml', '--cells');
    expect(code).toBe(0);
    // By hand: fixed 1, huffman 1 + 3, block-huffman 1 + 3, three arith of 1 + 3 + 3 + 3, deflate-preset 1.
    expect(out).toMatch(/^40 cells, about /m);
    expect(out).toMatch(/^log\/arith:order=2@primed\/file$/m);
  });

  it('reports a cell that cannot work as failed, and the others as right', () => {
    const values = new Uint8Array(4000);
    for (let i = 0; i < values.length; i++) values[i] = (i * 2654435761) >>> 24;
    put('wide.bin', values);
    put(
      'wide.yaml',
      `plan: 1\ncorpora:\n  wide: {files: wide.bin, symbols: u16le, messages: whole}\ncandidates: [huffman, "arith:order=0,backoff=none"]\ntables: [sent, learned]\n`,
    );
    const { code, out } = bitassay('run', 'wide.yaml');
    expect(code).toBe(3);
    expect(out).toMatch(/^! arith:order=0,backoff=none learned\/message: no rate\./m);
    expect(out).toMatch(/huffman +sent/);
  });

  it('keeps a partial record when interrupted', async () => {
    put('plan-log.txt', logText(2000));
    put(
      'long.yaml',
      'plan: 1\ncorpora:\n  log: {files: plan-log.txt, symbols: bytes, messages: whole}\ncandidates: ["arith:order=2,halve_at=1000..2500"]\ntables: [learned]\ntiming: {repeats: 1}\n',
    );
    const child = spawn(process.execPath, [main, 'run', 'long.yaml'], {
      cwd: folder,
      stdio: ['ignore', 'ignore', 'pipe'],
    });
    let err = '';
    let asked = false;
    const code = await new Promise<number | null>((resolve) => {
      child.stderr.on('data', (chunk) => {
        err += String(chunk);
        // What the plan leaves open is said just before the first cell. Once only: a second interrupt ends at once.
        if (!asked && err.includes('leaves open')) {
          asked = true;
          setTimeout(() => child.kill('SIGINT'), 1000);
        }
      });
      child.on('close', resolve);
    });
    expect(code, err).toBe(130);
    const record = recordOf(readFileSync(join(folder, 'long.run/run.json'), 'utf8'));
    expect(record.partial).toBe(true);
    expect(record.cells.length).toBeGreaterThan(0);
    expect(record.cells.every((cell) => cell.verified)).toBe(true);
  }, 60_000);
});

describe('entropy', () => {
  it('prints the corpora and entropy of a record', () => {
    const { code, out } = bitassay(
      'entropy',
      put('entropy.txt', logText(500)),
      '--messages',
      'lines',
      '--upto',
      '2',
      '--json',
    );
    expect(code).toBe(0);
    const parts = JSON.parse(out) as Pick<RunRecord, 'corpora' | 'entropy'>;
    expect(Object.keys(parts)).toEqual(['corpora', 'entropy']);
    expect(parts.entropy.map((e) => e.contexts)).toEqual(['message', 'running']);
    expect(parts.entropy[0].orders.map((o) => o.k)).toEqual([0, 1, 2]);
    for (const { floor } of parts.entropy) {
      expect(floor.low).toBeLessThanOrEqual(floor.point);
      expect(floor.point).toBeLessThanOrEqual(floor.high);
    }
  });

  it('takes a plan, and then the part of each corpus that is coded', () => {
    put('plan-log.txt', logText(300));
    put('plan.yaml', plan());
    const { code, out } = bitassay('entropy', 'plan.yaml', '--rough', '--json');
    expect(code).toBe(0);
    expect((JSON.parse(out) as RunRecord).corpora[0].message_count).toBe(150);
  });
});

describe('bad use and bad input', () => {
  const cases: [what: string, args: () => string[], says: RegExp][] = [
    ['a missing file', () => ['try', 'no-such-file.bin'], /no-such-file\.bin/],
    ['an empty file', () => ['try', put('empty.bin', '')], /empty\.bin.*empty/s],
    [
      'a folder',
      () => {
        mkdirSync(join(folder, 'a-folder'), { recursive: true });
        return ['try', 'a-folder'];
      },
      /a-folder.*folder/s,
    ],
    [
      'a CSV file without that column',
      () => ['try', put('t.csv', 'time,speed\n1,2\n'), '--symbols', 'csv:sped'],
      /sped.*speed/s,
    ],
    [
      'a ragged record file',
      () => [
        'try',
        put('ragged.bin', new Uint8Array(50)),
        '--record',
        '24',
        '--messages',
        'records=1',
      ],
      /50.*24|24.*50/s,
    ],
    ['an unknown coder', () => ['try', put('x.txt', 'abc'), '--coder', 'hufman'], /huffman/],
    ['an unknown key', () => ['try', put('x.txt', 'abc'), '--coder', 'arith:ordr=1'], /order/],
    [
      'a value out of range',
      () => ['try', put('x.txt', 'abc'), '--coder', 'arith:order=99'],
      /0 to 8/,
    ],
    [
      'a key that is not built yet',
      () => ['try', put('x.txt', 'abc'), '--coder', 'huffman:lanes=2'],
      /not built yet/,
    ],
    ['an unknown option', () => ['try', put('x.txt', 'abc'), '--mesages', 'lines'], /--messages/],
    ['an unknown command', () => ['tri', 'x'], /try/],
    ['symbols unknown', () => ['try', put('x.txt', 'abc'), '--symbols', 'byte'], /bytes/],
    [
      'a broken plan',
      () => ['run', put('broken.yaml', 'plan: 1\ncorpora: {a: {files: [}\n')],
      /broken\.yaml/,
    ],
    [
      'an unknown plan key',
      () => ['run', put('key.yaml', `${plan()}candidate: [huffman]\n`)],
      /candidate.*candidates/s,
    ],
    [
      'a plan key not built yet',
      () => [
        'run',
        put('later.yaml', plan('coders: {ours: {encode: ./codec -e, decode: ./codec -d}}')),
      ],
      /coders.*not/s,
    ],
    [
      'an unknown candidate in a plan',
      () => ['run', put('cand.yaml', plan().replace('huffman,', 'hufman,'))],
      /cand\.yaml, line 5/,
    ],
    [
      'no cells left',
      () => ['run', put('plan.yaml', plan()), '--only', 'nothing-like-it'],
      /nothing-like-it/,
    ],
    [
      'a range of 10 000 candidates',
      () => [
        'run',
        put('many.yaml', plan().replace('arith:order=0..2', 'arith:order=0,halve_at=1000..10999')),
      ],
      /100 010 cells.*about/s,
    ],
    [
      'one message to train on',
      () => ['try', put('x.txt', 'abc'), '--tables', 'shipped'],
      /message/,
    ],
    [
      'a symbol outside the alphabet of the train part',
      () => [
        'try',
        put('late.txt', 'aaaa\nabab\nbabá\nbbbé\n'),
        '--symbols',
        'codepoints',
        '--messages',
        'lines',
      ],
      /late\.txt.*outside|outside.*late\.txt/s,
    ],
  ];

  it.each(cases)('%s: exit 2 and one paragraph', (_what, args, says) => {
    put('plan-log.txt', logText(20));
    const { code, out, err } = bitassay(...args());
    expect(err).toMatch(says);
    expect(code, err).toBe(2);
    expect(out).toBe('');
    expect(err).not.toMatch(/\n\s+at /);
    expect(err.trimEnd()).not.toMatch(/\n\n/);
  });

  it('says 4 when the disk is full', () => {
    const { code, err } = bitassay(
      'try',
      put('x.txt', 'abcabc'),
      '--coder',
      'huffman',
      '--json',
      '-o',
      '/dev/full',
    );
    expect(err).toMatch(/disk is full/);
    expect(code).toBe(4);
  });

  it('does not overwrite a result unasked', () => {
    put('kept.json', 'kept');
    const args = ['try', put('x.txt', 'abcabc'), '--coder', 'huffman', '--json', '-o', 'kept.json'];
    expect(bitassay(...args).code).toBe(2);
    expect(readFileSync(join(folder, 'kept.json'), 'utf8')).toBe('kept');
    expect(bitassay(...args, '--force').code).toBe(0);
    expect(existsSync(join(folder, 'kept.json'))).toBe(true);
    expect(recordOf(readFileSync(join(folder, 'kept.json'), 'utf8')).cells).toHaveLength(1);
  });

  it.each(['try', 'run', 'entropy', 'coders', 'encode', 'decode'])(
    '%s --help has examples',
    (command) => {
      const { code, out } = bitassay(command, '--help');
      expect(code).toBe(0);
      expect(out).toMatch(/Examples:\n( {2}bitassay .*\n){2}/);
    },
  );
});
