import { mkdtemp, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { type Plan, parsePlan, readPlan } from '../../src/corpus/plan.ts';
import { knownKeysAt, planJsonSchema, planSchema } from '../../src/corpus/plan-schema.ts';
import { InputError, NotYetError } from '../../src/errors/errors.ts';

const SHORT = `plan: 1
corpora:
  events: {files: logs/*.log, symbols: bytes, messages: lines}
candidates: [huffman, "arith:order=0..4"]
`;

function refusal(text: string): InputError {
  try {
    parsePlan(text, 'demo/plan.yaml');
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
  throw new Error('the plan was accepted');
}

/** The lines of the error, each `line N, …`. */
const faultLines = (error: InputError) => error.message.split('\n  ').slice(1);

describe('parsePlan', () => {
  test('fills in what a short plan leaves open, and says so', () => {
    const plan = parsePlan(SHORT, 'demo/plan.yaml');
    expect(plan).toMatchObject({
      file: 'demo/plan.yaml',
      folder: 'demo',
      corpora: [{ name: 'events', files: ['logs/*.log'], symbols: 'bytes', messages: 'lines' }],
      split: { by: 'message', order: 'in_time', train: 0.5 },
      candidates: ['huffman', 'arith:order=0..4'],
      candidateLines: [4, 4],
      tables: ['shipped', 'sent', 'learned'],
      reset: ['message'],
      align: 8,
      check: 'none',
      timing: { repeats: 20, pacer: 'deflate-huffman' },
    } satisfies Partial<Plan>);
    expect(plan.chosen).toEqual([
      'split.by: message',
      'split.order: in_time',
      'split.train: 0.5',
      'tables: [shipped, sent, learned]',
      'reset: [message]',
      'align: 8',
      'timing.repeats: 20',
    ]);
  });

  test('reads everything that is built', () => {
    const plan = parsePlan(
      `plan: 1
title: Tracker uplink
corpora:
  telemetry:
    files: [telemetry.bin, more/*.bin]
    record: {bytes: 24, fields: {dt: u16le@0, set_point: s16le@2, position: s32le@16}}
    symbols: field:set_point
    messages: records=8
    lengths: known
  positions.v2:
    files: positions.csv
    symbols: csv:latitude
    messages: every=16
    step: 0.01
    alphabet: 4096
split: {by: block, order: random, train: 0.25, seed: 9}
candidates:
  - huffman
  # a comment
  - rice:k=2
tables: [learned]
reset: [message, file, never]
align: 1
check: none
timing: {repeats: 3, pacer: brotli}
`,
      'plan.yaml',
    );
    expect(plan).toMatchObject({
      folder: '.',
      title: 'Tracker uplink',
      corpora: [
        {
          name: 'telemetry',
          files: ['telemetry.bin', 'more/*.bin'],
          record: {
            bytes: 24,
            fields: [
              { name: 'dt', type: 'u16le', offsetBytes: 0, widthBytes: 2 },
              { name: 'set_point', type: 's16le', offsetBytes: 2, widthBytes: 2 },
              { name: 'position', type: 's32le', offsetBytes: 16, widthBytes: 4 },
            ],
          },
          symbols: 'field:set_point',
          messages: 'records=8',
          lengths: 'known',
        },
        { name: 'positions.v2', step: 0.01, alphabet: 4096 },
      ],
      split: { by: 'block', order: 'random', train: 0.25, seed: 9 },
      candidateLines: [18, 20],
      tables: ['learned'],
      reset: ['message', 'file', 'never'],
      align: 1,
      timing: { repeats: 3, pacer: 'brotli' },
      chosen: [],
    });
  });

  test('a random split without a seed says which one it takes', () => {
    const plan = parsePlan(`${SHORT}split: {order: random}\n`, 'plan.yaml');
    expect(plan.split.seed).toBe(1);
    expect(plan.chosen).toContain('split.seed: 1');
  });
});

/** A sound plan, line by line; each may be broken in some way. */
const LINES: [good: string, broken: [line: string, key: string, words: RegExp][]][] = [
  [
    'plan: 1',
    [
      ['plan: 2', 'plan', /expected 1, the version of the plan file; got 2/],
      ['plan: "1"', 'plan', /got "1"/],
      ['plam: 1', 'plam', /no such key.*Did you mean plan\?/],
    ],
  ],
  ['title: Tracker uplink', [['title: 7', 'title', /expected a line of text; got 7/]]],
  ['corpora:', []],
  [
    '  telemetry:',
    [
      ['  tele metry:', 'corpora.tele metry', /not allowed as a name/],
      ['  tele/metry:', 'corpora.tele/metry', /not allowed as a name/],
    ],
  ],
  [
    '    files: telemetry.bin',
    [
      [
        '    files: 3',
        'corpora.telemetry.files',
        /expected a path or pattern, or a list of them; got 3/,
      ],
      ['    files: []', 'corpora.telemetry.files', /got \[\]/],
      ['    file: telemetry.bin', 'corpora.telemetry.file', /Did you mean files\?/],
    ],
  ],
  [
    '    record: {bytes: 24, fields: {dt: u16le@0}}',
    [
      ['    record: {bytes: 0}', 'corpora.telemetry.record.bytes', /a whole number from 1 to/],
      ['    record: {byte: 24}', 'corpora.telemetry.record.byte', /Did you mean bytes\?/],
      [
        '    record: {bytes: 24, fields: {dt: u16el@0}}',
        'corpora.telemetry.record.fields.dt',
        /Did you mean u16le\?/,
      ],
      [
        '    record: {bytes: 24, fields: {dt: u16le@23}}',
        'corpora.telemetry.record.fields.dt',
        /outside its record/,
      ],
    ],
  ],
  [
    '    symbols: field:dt',
    [
      ['    symbols: feild:dt', 'corpora.telemetry.symbols', /Did you mean field:NAME\?/],
      ['    symbols: field:td', 'corpora.telemetry.symbols', /expected one of dt/],
      ['    symbols: ', 'corpora.telemetry.symbols', /got nothing/],
    ],
  ],
  [
    '    messages: records=8',
    [
      ['    messages: record=8', 'corpora.telemetry.messages', /Did you mean records\?/],
      ['    messages: lines', 'corpora.telemetry.messages', /a record has no lines/],
    ],
  ],
  [
    '    lengths: link',
    [['    lengths: lnik', 'corpora.telemetry.lengths', /Did you mean link\?/]],
  ],
  [
    '    alphabet: 65536',
    [['    alphabet: 0', 'corpora.telemetry.alphabet', /from 1 to 16777216; got 0/]],
  ],
  [
    'split: {by: message, order: random, train: 0.5, seed: 4}',
    [
      ['split: {by: mesage}', 'split.by', /Did you mean message\?/],
      ['split: {train: 1.01}', 'split.train', /a number from 0 to 1; got 1.01/],
      ['split: {train: -0.5}', 'split.train', /got -0.5/],
      ['split: {train: half}', 'split.train', /got "half"/],
      ['split: {seed: 4}', 'split.seed', /a seed changes nothing here/],
      ['split: {order: in_time, seed: 4}', 'split.seed', /expected order: random/],
      ['split: [message]', 'split', /expected a map with the keys by, order/],
    ],
  ],
  ['candidates:', [['candidate:', 'candidate', /Did you mean candidates\?/]]],
  ['  - huffman', [['  - 7', 'candidates[0]', /expected a candidate/]]],
  ['  - rice:k=2', [['  - huffman', 'candidates[1]', /listed twice/]]],
  [
    'tables: [shipped]',
    [
      ['tables: shipped', 'tables', /expected a list of/],
      ['tables: []', 'tables', /got \[\]/],
      ['tables: [shiped]', 'tables[0]', /Did you mean shipped\?/],
      ['tables: [sent, sent]', 'tables[1]', /listed twice/],
    ],
  ],
  ['reset: [message]', [['reset: [always]', 'reset[0]', /message, file, never or message\*R/]]],
  ['align: 8', [['align: 12', 'align', /expected 1, 8, 16, 32 or 64; got 12/]]],
  ['check: none', [['check: crc', 'check', /none or crc32/]]],
  ['timing: {repeats: 5}', [['timing: {repeat: 5}', 'timing.repeat', /Did you mean repeats\?/]]],
];

describe('a random split', () => {
  const withSplit = (split: string, reset: string, tables = 'shipped, learned') =>
    `${SHORT}split: {${split}}\ntables: [${tables}]\nreset: [${reset}]\n`;

  test.each([
    ['order: random', 'never', 'never'],
    ['order: random', 'message, file', 'file'],
    ['by: block, order: random', 'never, "message*8"', 'never, message*8'],
    ['by: file, order: random', 'file, never', 'never'],
  ])('{%s} with reset [%s] is refused, with the line of the order', (split, reset, got) => {
    const error = refusal(withSplit(split, reset));
    expect(error.message).toMatch(/line 5, split\.order: .*do not follow one another/);
    expect(error.message).toContain(`got reset: [${got}]`);
    expect(error.message).toMatch(/order: in_time/);
  });

  test.each([
    ['order: random', 'message', 'shipped'],
    ['by: file, order: random', 'message, file', 'shipped, primed'],
    ['order: in_time', 'never, file', 'shipped'],
    // Nothing trains, so nothing is split.
    ['order: random', 'never', 'sent, learned'],
  ])('{%s} with reset [%s] and tables [%s] is a plan', (split, reset, tables) => {
    expect(parsePlan(withSplit(split, reset, tables), 'plan.yaml').split.order).toBeDefined();
  });
});

describe('a broken plan', () => {
  test('the plan that the faults are planted in is sound', () => {
    expect(() => parsePlan(LINES.map(([good]) => good).join('\n'), 'plan.yaml')).not.toThrow();
  });

  const planted = LINES.flatMap(([, broken], at) =>
    broken.map(([line, key, words]) => ({ at, line, key, words })),
  );

  test.each(planted)('$key: $line', ({ at, line, key, words }) => {
    const text = LINES.map(([good], i) => (i === at ? line : good)).join('\n');
    const error = refusal(text);
    const own = faultLines(error).filter((l) => l.startsWith(`line ${at + 1}, ${key}: `));
    expect(own).toHaveLength(1);
    expect(own[0]).toMatch(words);
    expect(error).not.toBeInstanceOf(NotYetError);
    expect(error.where.file).toBe('demo/plan.yaml');
  });

  test('every fault is named with its line, wherever it stands', () => {
    const choice = fc.record({ before: fc.nat(3), broken: fc.option(fc.nat(6)) });
    fc.assert(
      fc.property(fc.array(choice, { minLength: LINES.length, maxLength: LINES.length }), (c) => {
        const lines: string[] = [];
        const expected: string[] = [];
        // Faults that change what another line means, or that another line makes, are planted alone above.
        const alone = new Set(['corpora:', '  telemetry:', 'candidates:', '  - rice:k=2']);
        LINES.forEach(([good, broken], i) => {
          for (let j = 0; j < c[i].before; j++) lines.push(j % 2 === 0 ? '# note' : '');
          const pick = c[i].broken;
          const fault = pick === null || alone.has(good) ? undefined : broken[pick];
          lines.push(fault?.[0] ?? good);
          if (fault !== undefined) expected.push(`line ${lines.length}, ${fault[1]}: `);
        });
        // A corpus is held together only once its keys are sound, so these may wait for the next try.
        const waits = /corpora\.telemetry\.(symbols|messages|record\.fields)/;
        if (expected.length === 0) return;
        const found = faultLines(refusal(lines.join('\n')));
        for (const start of expected) {
          if (expected.length > 1 && waits.test(start)) continue;
          expect(found.filter((line) => line.startsWith(start))).toHaveLength(1);
        }
        const numbers = found.map((line) => Number(/^line (\d+)/.exec(line)?.[1]));
        expect(numbers).toEqual([...numbers].sort((a, b) => a - b));
      }),
      { numRuns: 200 },
    );
  });

  test('all faults come in one error', () => {
    const error = refusal(
      'plan: 1\ntitle: [x]\ncorpora:\n  a: {files: x, symbols: bites, messages: lins}\ncandidates: []\nalign: 9\n',
    );
    expect(error.message.split('\n')[0]).toBe('demo/plan.yaml has 5 faults:');
    expect(faultLines(error).map((line) => line.slice(0, 9))).toEqual([
      'line 2, t',
      'line 4, c',
      'line 4, c',
      'line 5, c',
      'line 6, a',
    ]);
  });

  test('a missing key is named at what lacks it', () => {
    const error = refusal('plan: 1\ncorpora:\n  a:\n    files: x\n    symbols: bytes\n');
    expect(faultLines(error)).toEqual([
      expect.stringMatching(
        /^line 1, candidates: the key is missing; expected a list of candidates/,
      ),
      expect.stringMatching(/^line 3, corpora.a.messages: the key is missing/),
    ]);
  });

  test('no corpus, and no candidate', () => {
    expect(faultLines(refusal('plan: 1\ncorpora: {}\ncandidates: []\n'))).toEqual([
      'line 2, corpora: not allowed; expected at least one corpus; got {}',
      'line 3, candidates: not allowed; expected a list of candidates; got []',
    ]);
  });

  test('a corpus named twice', () => {
    const error = refusal(
      'plan: 1\ncorpora:\n  a: {files: x, symbols: bytes, messages: whole}\n  a: {files: y, symbols: bytes, messages: whole}\ncandidates: [fixed]\n',
    );
    expect(error.message).toContain('line 4, a: the key stands twice');
    expect(error.where).toMatchObject({ line: 4, key: 'a' });
  });

  test.each([
    ['', 1],
    ['- plan: 1\n', 1],
    ['plan: 1\ncandidates: [huffman\n', 3],
    ['plan: 1\ncorpora: *nowhere\n', undefined],
    ['plan: 1\n\tcorpora: x\n', 2],
    ['plan: 1\n---\nplan: 1\n', undefined],
  ])('no YAML map: %j', (text, line) => {
    const error = refusal(text);
    expect(faultLines(error).length).toBeGreaterThan(0);
    if (line !== undefined) expect(faultLines(error)[0]).toMatch(new RegExp(`^line ${line}, `));
  });

  test('keys that every object has are unknown keys here', () => {
    const error = refusal(`${SHORT}__proto__: {a: 1}\nconstructor: 1\n`);
    expect(faultLines(error)).toEqual([
      expect.stringMatching(/^line 5, __proto__: no such key/),
      expect.stringMatching(/^line 6, constructor: no such key/),
    ]);
  });

  test('any text is a plan or an InputError', () => {
    const piece = fc.constantFrom(
      'plan',
      'corpora',
      'a',
      ':',
      ' ',
      '\n',
      '  ',
      '- ',
      '{',
      '}',
      '[',
      ']',
      '1',
      '"',
      '*a',
      '&a',
      ',',
      '#',
    );
    fc.assert(
      fc.property(fc.array(piece, { maxLength: 30 }), (pieces) => {
        expect(refusal(pieces.join(''))).toBeInstanceOf(InputError);
      }),
      { numRuns: 500 },
    );
  });
});

describe('what is not yet built', () => {
  test.each([
    ['coders: {ours: {encode: ./codec -e, decode: ./codec -d, protocol: batch}}', 'coders'],
    ['check: crc32', 'check'],
  ])('%s', (line, key) => {
    const error = refusal(`${SHORT}${line}\n`);
    expect(error).toBeInstanceOf(NotYetError);
    expect(faultLines(error)).toEqual([expect.stringMatching(/^line 5, .*not yet built/)]);
    expect(error.where).toMatchObject({ key, line: 5 });
  });

  test.each([
    ['words', 'lines', 'corpora.e.symbols'],
    ['json:/a', 'lines', 'corpora.e.symbols'],
    ['parquet:a', 'whole', 'corpora.e.symbols'],
  ])('symbols %s, messages %s', (symbols, messages, key) => {
    const error = refusal(
      `plan: 1\ncorpora:\n  e:\n    files: x\n    symbols: ${symbols}\n    messages: ${messages}\ncandidates: [fixed]\n`,
    );
    expect(error).toBeInstanceOf(NotYetError);
    expect(error.message).toContain('not yet built');
    expect(error.where.key).toBe(key);
  });

  test('beside a real fault it is an InputError, and both are named', () => {
    const error = refusal(`${SHORT}align: 3\ncheck: crc32\n`);
    expect(error).not.toBeInstanceOf(NotYetError);
    expect(faultLines(error)).toHaveLength(2);
  });
});

describe('what a choice is made by', () => {
  const LIMITS =
    'limits: {max: {flash_bytes: 40960, message_bytes_p99: 192}, min: {encode_speed: 0.2}, exports: c, reset: message}';
  const COST =
    'cost: {price_per_megabyte: 900, currency: EUR, bill_step_bytes: 192, units_per_day: 480, devices: 14000}';

  test('is read as it stands', () => {
    expect(parsePlan(SHORT, 'p.yaml').decision).toEqual({});
    const { decision, billStepBytes } = parsePlan(`${SHORT}${LIMITS}\n${COST}\n`, 'p.yaml');
    expect(decision.limits).toEqual({
      max: { flash_bytes: 40960, message_bytes_p99: 192 },
      min: { encode_speed: 0.2 },
      exports: 'c',
      reset: 'message',
    });
    expect(decision.cost?.devices).toBe(14000);
    expect(billStepBytes).toBe(192);
    expect(decision.weights).toBeUndefined();
  });

  test('takes the weights of corpora', () => {
    const plan = parsePlan(
      'plan: 1\ncorpora:\n  e: {files: x, symbols: bytes, messages: lines, weight: 0.2}\ncandidates: [fixed]\n',
      'p.yaml',
    );
    expect(plan.decision.weights).toEqual({ e: 0.2 });
  });

  test.each([
    'cost: {bill_step_bytes: 0}',
    'cost: {bill_step_bytes: 1.5}',
    'cost: {price: 3}',
    'limits: {max: {flash: 3}}',
    'limits: {max: {flash_bytes: -3}}',
    'limits: {min: {encode_speed: fast}}',
    'limits: {exports: rust}',
    'limits: {reset: sometimes}',
  ])('refuses %s, with its line', (line) => {
    const error = refusal(`${SHORT}${line}\n`);
    expect(error).toBeInstanceOf(InputError);
    expect(error.where.line).toBe(5);
  });
});

describe('memory and sample', () => {
  test('are read', () => {
    const plan = parsePlan(`${SHORT}memory: 512MB\nsample: {every: 12, block: 1MB}\n`, 'p.yaml');
    expect(plan.memoryBytes).toBe(512e6);
    expect(plan.corpora[0].sample).toEqual({ kind: 'every', every: 12, blockBytes: 1e6 });
    const drawn = parsePlan(`${SHORT}sample: {reservoir: 64MB, block: 2MiB, seed: 7}\n`, 'p.yaml');
    expect(drawn.corpora[0].sample).toEqual({
      kind: 'reservoir',
      bytes: 64e6,
      blockBytes: 2 ** 21,
      seed: 7,
    });
    expect(parsePlan(SHORT, 'p.yaml').memoryBytes).toBeUndefined();
  });

  test.each([
    ['memory: 12 bananas', 'memory', 'a size such as 512MB'],
    ['memory: 512', 'memory', 'a size such as 512MB'],
    ['memory: 100MB', 'memory', 'at least 256MB'],
    ['sample: {every: 0}', 'sample.every', 'a whole number from 1'],
    ['sample: {block: 1MB}', 'sample', 'every or reservoir'],
    ['sample: {every: 2, reservoir: 1MB}', 'sample', 'not both'],
    ['sample: {every: 2, block: 1B}', 'sample.block', '256 to'],
    ['sample: {every: 2, seed: 3}', 'sample.seed', 'reservoir beside it'],
    ['sample: {reservoir: 1kB}', 'sample.reservoir', '1000000 bytes or more'],
  ])('%s is refused with its line', (line, key, expected) => {
    const error = refusal(`${SHORT}${line}\n`);
    expect(error).not.toBeInstanceOf(NotYetError);
    expect(faultLines(error)).toEqual([expect.stringMatching(/^line 5, /)]);
    expect(error.where).toMatchObject({ key, line: 5 });
    expect(error.message).toContain(expected);
  });

  test('a sample is held against how the corpora are read', () => {
    const error = refusal(
      'plan: 1\ncorpora:\n  e: {files: x, symbols: bytes, messages: "fill=192,unit=24"}\ncandidates: [fixed]\nsample: {every: 2}\n',
    );
    expect(faultLines(error)).toEqual([
      expect.stringMatching(/^line 3, corpora.e: a sample does not go with messages: fill/),
    ]);
  });
});

describe('the schema', () => {
  // The plan of the design, whole: every key that there is to be.
  const WHOLE = {
    plan: 1,
    title: 'Tracker uplink',
    corpora: {
      telemetry: {
        files: 'telemetry.bin',
        record: { bytes: 24, fields: { dt: 'u16le@0', set_point: 's16le@2' } },
        symbols: 'bytes',
        messages: 'fill=192,unit=24',
        lengths: 'link',
        alphabet: 256,
        fields: { dt: 'delta' },
      },
      events: { files: ['logs/*.log'], symbols: 'bytes', messages: 'lines', weight: 0.2 },
    },
    split: { by: 'message', order: 'in_time', train: 0.5, folds: 5 },
    candidates: ['huffman', 'block-huffman:n=2', 'arith:order=0..4'],
    coders: { ours: { encode: 'codec -e', decode: 'codec -d', protocol: 'batch' } },
    tables: ['shipped', 'learned', 'primed'],
    reset: ['message', 'file', 'message*16'],
    align: 8,
    check: 'none',
    timing: { repeats: 20, pacer: 'deflate-huffman' },
    product: { device: 'encoder' },
    limits: {
      max: { flash_bytes: 40960, ram_bytes: 4096, message_bytes_p99: 192 },
      min: { encode_speed: 0.2, units_per_message: 10 },
      exports: 'c',
      reset: 'message',
    },
    cost: {
      price_per_megabyte: 900,
      currency: 'EUR',
      bill_step_bytes: 192,
      units_per_day: 480,
      devices: 14000,
    },
    vary: { train_share: [0.01, 0.1, 1], message_symbols: [16, 64, 256, 1024] },
    budget: { cell_seconds: 120, cell_memory: '2GB' },
    sample: { every: 12, block: '1MB' },
    memory: '512MB',
    loss: { rate: 0.01 },
    damage: { flip: 0.0001, seed: 7 },
    gate: { allow: { total: 0, each_file: '0.5%' } },
  };

  test('has a place for every key from the first day', () => {
    expect(planSchema.parse(WHOLE)).toEqual(WHOLE);
  });

  test('is published as a JSON Schema that names the same keys and closes every map', () => {
    const published = planJsonSchema() as {
      $schema: string;
      properties: Record<string, object>;
      required: string[];
    };
    expect(published.$schema).toContain('2020-12');
    expect(Object.keys(published.properties)).toEqual(expect.arrayContaining(Object.keys(WHOLE)));
    expect(published.required).toEqual(['plan', 'corpora', 'candidates']);
    expect(JSON.stringify(published)).not.toContain('"additionalProperties":true');
    expect(published).toMatchObject({ additionalProperties: false });
  });

  test('knows the keys of every place', () => {
    expect(knownKeysAt(['split'])).toEqual(['by', 'order', 'train', 'seed', 'folds']);
    expect(knownKeysAt(['corpora'])).toEqual([]);
    expect(knownKeysAt(['corpora', 'x', 'record'])).toEqual(['bytes', 'fields']);
    expect(knownKeysAt(['candidates', 0])).toEqual([]);
  });
});

describe('readPlan', () => {
  test('reads a file, and refuses one that is missing or no text', async () => {
    const folder = await mkdtemp(join(tmpdir(), 'bitassay-plan-'));
    try {
      const path = join(folder, 'plan.yaml');
      await writeFile(path, SHORT);
      expect(await readPlan(path)).toMatchObject({ file: path, folder });
      await expect(readPlan(join(folder, 'plan.yml'))).rejects.toMatchObject({
        name: 'InputError',
        where: { advice: 'In the same folder there is plan.yaml.' },
      });
      await writeFile(path, Buffer.from([0x70, 0xff]));
      await expect(readPlan(path)).rejects.toMatchObject({
        name: 'InputError',
        message: expect.stringContaining('not UTF-8'),
      });
    } finally {
      await rm(folder, { recursive: true });
    }
  });
});
