import { Command } from 'commander';
import { afterEach, describe, expect, it, vi } from 'vitest';
import { candidateExamples, coderListScreen, coderScreen } from '../../src/cli/coder-screens.ts';
import { registerCoders } from '../../src/cli/commands/coders.ts';
import { parseCandidates } from '../../src/coders/candidate.ts';
import type { Declaration } from '../../src/coders/contract.ts';
import { coderEntries } from '../../src/coders/registry.ts';
import { InputError } from '../../src/errors/errors.ts';

const declarations = coderEntries.map(({ declaration }) => declaration);

/** Made up, so that the screens in this file change only when the layout does. */
const plain: Declaration = {
  name: 'plain',
  summary:
    'Every symbol as it stands, which is what a product pays that has no entropy coder at all.',
  parameters: [],
  policies: ['none'],
  resets: ['message'],
  needsWholeMessage: false,
  reference: false,
  maxAlphabetSize: 65536,
  worstCase: '16 bits a symbol',
  memory: 'none',
  source: 'common practice, no source',
};
const guessing: Declaration = {
  ...plain,
  name: 'guessing-coder',
  summary: 'Guesses the next symbol.',
  parameters: [
    {
      key: 'depth',
      kind: 'integer',
      min: 0,
      max: 9,
      standard: 2,
      summary: 'how far it looks back',
    },
    { key: 'start', kind: 'word', words: ['kt', 'add:X'], standard: 'kt', summary: 'first counts' },
  ],
  policies: ['shipped', 'learned'],
  resets: ['message', 'file', 'never'],
};
const general: Declaration = {
  ...plain,
  name: 'general',
  reference: true,
  needsWholeMessage: true,
};

afterEach(() => vi.restoreAllMocks());

/** What the command writes to standard output. */
async function outputOf(...args: string[]): Promise<string> {
  let written = '';
  vi.spyOn(process.stdout, 'write').mockImplementation((chunk, ...rest) => {
    written += String(chunk);
    const done = rest.at(-1);
    if (typeof done === 'function') done();
    return true;
  });
  const program = new Command('bitassay').exitOverride();
  registerCoders(program);
  for (const command of program.commands) command.exitOverride();
  await program.parseAsync(['coders', ...args], { from: 'user' });
  vi.restoreAllMocks();
  return written;
}

describe('the list of coders', () => {
  it('at 100 columns', () => {
    expect(coderListScreen([plain, guessing, general], 100)).toBe(` Coders
 plain           Every symbol as it stands, which is what a product pays that has no entropy coder
                 at all.
                 no tables; common practice, no source
 guessing-coder  Guesses the next symbol.
                 tables shipped, learned; common practice, no source

 References: general-purpose coders, shown for scale, never the pick
 general         Every symbol as it stands, which is what a product pays that has no entropy coder
                 at all.
                 no tables; common practice, no source

 Parameters, limits, memory and examples of one: bitassay coders NAME
`);
  });

  it('at 80 columns', () => {
    expect(coderListScreen([plain, guessing, general], 80)).toBe(` Coders
 plain           Every symbol as it stands, which is what a product pays that
                 has no entropy coder at all.
                 no tables; common practice, no source
 guessing-coder  Guesses the next symbol.
                 tables shipped, learned; common practice, no source

 References: general-purpose coders, shown for scale, never the pick
 general         Every symbol as it stands, which is what a product pays that
                 has no entropy coder at all.
                 no tables; common practice, no source

 Parameters, limits, memory and examples of one: bitassay coders NAME
`);
  });

  it('names every registered coder and keeps within the columns', () => {
    for (const columns of [80, 100]) {
      const screen = coderListScreen(declarations, columns);
      for (const { name } of declarations) expect(screen).toContain(`\n ${name} `);
      for (const line of screen.split('\n')) {
        expect([...line].length, line).toBeLessThanOrEqual(columns);
      }
    }
  });
});

describe('one coder', () => {
  it('with parameters', () => {
    expect(
      coderScreen(guessing, ['guessing-coder', 'guessing-coder:depth=9'], 80),
    ).toBe(` guessing-coder: Guesses the next symbol.

 Parameters
 depth       0 to 9; usually 2
             how far it looks back
 start       kt | add:X; usually kt
             first counts

 tables      shipped, learned
 resets      message, file, never
 alphabet    up to 65 536 symbols
 worst case  16 bits a symbol
 memory      none
 delay       the encoder writes while it reads
 source      common practice, no source
 examples    guessing-coder
             guessing-coder:depth=9

 Measure it: bitassay try FILE --coder guessing-coder
`);
  });

  it('that is a reference without parameters or tables', () => {
    expect(
      coderScreen(general, ['general'], 80),
    ).toBe(` general: Every symbol as it stands, which is what a product pays that has no
          entropy coder at all.
 A reference: shown for scale, never the pick; its bits are never gated.

 No parameters

 tables      none needed
 resets      none needed: nothing is kept from message to message
 alphabet    up to 65 536 symbols
 worst case  16 bits a symbol
 memory      none
 delay       the encoder holds a whole message before its first bit
 source      common practice, no source
 examples    general

 Measure it: bitassay try FILE --coder general
`);
  });

  it.each(declarations.map((d) => [d.name, d] as const))('%s: its examples work', (name, d) => {
    const examples = candidateExamples(d);
    expect(examples.length).toBeGreaterThanOrEqual(Math.min(2, 1 + d.parameters.length));
    expect(new Set(examples).size).toBe(examples.length);
    for (const example of examples) {
      for (const candidate of parseCandidates(example)) {
        expect(candidate.declaration.name).toBe(name);
        // Parameters can change which policies the registry's entry declares.
        expect(candidate.create().declares.name).toBe(name);
      }
    }
    for (const columns of [80, 100]) {
      for (const line of coderScreen(d, examples, columns).split('\n')) {
        expect([...line].length, line).toBeLessThanOrEqual(columns);
      }
    }
  });
});

describe('bitassay coders', () => {
  it('writes the list, or one coder', async () => {
    expect(await outputOf()).toBe(coderListScreen(declarations, process.stdout.columns ?? 100));
    expect(await outputOf('deflate')).toContain('level       1 to 9; usually 9');
  });

  it('writes JSON with keys in snake case', async () => {
    const list = JSON.parse(await outputOf('--json'));
    expect(list.coders.map((c: { name: string }) => c.name)).toEqual(
      declarations.map((d) => d.name),
    );
    const one = JSON.parse(await outputOf('brotli', '--json'));
    expect(one).toMatchObject({ name: 'brotli', reference: true, needs_whole_message: true });
    expect(one.parameters[0]).toMatchObject({ key: 'quality', min: 0, max: 11 });
    for (const key of Object.keys(one)) expect(key).toMatch(/^[a-z_]+$/);
  });

  it('refuses a coder that is not there, with the nearest name', async () => {
    await expect(outputOf('deflat')).rejects.toThrow(InputError);
    await expect(outputOf('deflat')).rejects.toMatchObject({
      where: { advice: 'Did you mean deflate?' },
    });
  });
});
