import {
  existsSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  statSync,
  symlinkSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { Command } from 'commander';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { registerDecode } from '../../src/cli/commands/decode.ts';
import { registerEncode } from '../../src/cli/commands/encode.ts';
import { exitCodes, runCommand } from '../../src/cli/exit.ts';
import { CorruptStreamError } from '../../src/errors/errors.ts';
import { unpackContainer } from '../../src/harness/container.ts';
import type { ContainerHeader } from '../../src/harness/container-header.ts';

// The real decoder, unless a test breaks it.
vi.mock('../../src/harness/container.ts', async (original) => {
  const real = await original<typeof import('../../src/harness/container.ts')>();
  return { ...real, unpackContainer: vi.fn(real.unpackContainer) };
});

let folder: string;
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-encode-'));
});
afterEach(() => {
  vi.restoreAllMocks();
  rmSync(folder, { recursive: true, force: true });
});

const at = (name: string) => join(folder, name);
const log = Buffer.from(
  '12:00 reefer 4711 supply -18.3\n12:10 reefer 4711 supply -18.4\n'.repeat(60),
);

/** Runs one command line in this process. */
async function bitassay(...args: string[]): Promise<{ code: number; err: string }> {
  let err = '';
  vi.spyOn(process.stderr, 'write').mockImplementation((chunk) => {
    err += String(chunk);
    return true;
  });
  const program = new Command('bitassay').exitOverride();
  registerEncode(program);
  registerDecode(program);
  for (const command of program.commands) command.exitOverride();
  const code = await runCommand(() => program.parseAsync(args, { from: 'user' }));
  vi.restoreAllMocks();
  return { code, err };
}

describe('encode and decode', () => {
  beforeEach(() => writeFileSync(at('events.log'), log));

  it.each([
    ['fixed', 'bytes'],
    ['huffman', 'bytes'],
    ['deflate:level=3', 'u16be'],
    ['brotli:quality=4', 'codepoints'],
    ['huffman', 'bits'],
    ['arith:order=1', 'nibbles'],
  ])(
    'give back a file coded with %s from %s, and say so in one line each',
    async (coder, symbols) => {
      const written = await bitassay(
        ...['encode', at('events.log'), '-o', at('events.basy')],
        ...['--coder', coder, '--symbols', symbols],
      );
      expect(written.code).toBe(0);
      expect(written.err.split('\n').length).toBe(2);
      expect(written.err).toContain('decoded again and equal');
      const restored = await bitassay('decode', at('events.basy'), '-o', at('again.log'));
      expect(restored.code).toBe(0);
      expect(restored.err.split('\n').length).toBe(2);
      expect(readFileSync(at('again.log'))).toEqual(log);
      expect(readdirSync(folder).sort()).toEqual(['again.log', 'events.basy', 'events.log']);
    },
  );

  it('say how many bits a symbol takes', async () => {
    // 3720 bytes are 7440 nibbles of 4 bits. Elias delta of 7441, a number of 13 bits: 3 + 4 + 12 = 19 bits more. 29 779 bits
    // fill 3723 bytes, which are 4.003 bits a nibble.
    expect(log.length).toBe(3720);
    const { err } = await bitassay(
      ...['encode', at('events.log'), '-o', at('out'), '--coder', 'fixed', '--symbols', 'nibbles'],
    );
    expect(err).toMatch(
      /events\.log: 7\s440 symbols, 4\.00 bits\/nibble \(fixed\); 3\s720 bytes became/,
    );
    const size = readFileSync(at('out')).length;
    const header = Number(/header (\d+);/.exec(err)?.[1]);
    expect(size - header).toBe(3723);
  });

  it('take an empty file', async () => {
    writeFileSync(at('empty'), '');
    const { code, err } = await bitassay(
      'encode',
      at('empty'),
      '-o',
      at('out'),
      '--coder',
      'fixed',
    );
    expect(code).toBe(0);
    expect(err).toContain(': 0 symbols (fixed)');
    expect((await bitassay('decode', at('out'), '-o', at('again'))).code).toBe(0);
    expect(readFileSync(at('again')).length).toBe(0);
  });

  it('replace a file only with --force', async () => {
    writeFileSync(at('out'), 'precious');
    const args = ['encode', at('events.log'), '-o', at('out'), '--coder', 'fixed'];
    const refused = await bitassay(...args);
    expect(refused.code).toBe(exitCodes.badInput);
    expect(refused.err).toMatch(/exists already.*--force/s);
    expect(readFileSync(at('out'), 'utf8')).toBe('precious');
    expect((await bitassay(...args, '--force')).code).toBe(0);
    writeFileSync(at('again'), 'precious');
    expect((await bitassay('decode', at('out'), '-o', at('again'))).code).toBe(2);
    expect((await bitassay('decode', at('out'), '-o', at('again'), '--force')).code).toBe(0);
    expect(readFileSync(at('again'))).toEqual(log);
  });

  it('follow a link instead of replacing it', async () => {
    writeFileSync(at('target'), 'old');
    symlinkSync(at('target'), at('link'));
    const args = ['encode', at('events.log'), '-o', at('link'), '--coder', 'fixed', '--force'];
    expect((await bitassay(...args)).code).toBe(0);
    expect(readFileSync(at('target')).subarray(0, 4).toString()).toBe('BASY');
    expect(readFileSync(at('link'))).toEqual(readFileSync(at('target')));
  });
});

describe('places that are no files', () => {
  it('are written to, not replaced', async () => {
    writeFileSync(at('events.log'), log);
    const args = ['encode', at('events.log'), '--coder', 'fixed', '-o'];
    expect((await bitassay(...args, '/dev/null')).code).toBe(0);
    expect(statSync('/dev/null').isCharacterDevice()).toBe(true);
    // A device that is always full.
    const full = await bitassay(...args, '/dev/full');
    expect(full.code).toBe(exitCodes.environment);
    expect(full.err).toContain('the disk is full');
  });
});

describe('encode refuses', () => {
  beforeEach(() => writeFileSync(at('events.log'), log));

  it.each([
    ['a coder that is not there', ['--coder', 'hufman'], /Did you mean huffman/],
    ['a range of candidates', ['--coder', 'deflate:level=1..3'], /one is wanted/],
    ['symbols that are not there', ['--coder', 'fixed', '--symbols', 'byte'], /Did you mean bytes/],
    ['a part of a file', ['--coder', 'fixed', '--symbols', 'csv:x'], /only a part of a file/],
    [
      'tables it cannot have',
      ['--coder', 'fixed', '--tables', 'sent'],
      /cannot be coded with sent/,
    ],
    ['shipped tables, for now', ['--coder', 'deflate-preset'], /not built yet/],
    ['primed tables, for now', ['--coder', 'huffman', '--tables', 'primed'], /primed/],
    ['other tables', ['--coder', 'fixed', '--tables', 'given'], /sent or learned/],
    ['no coder', [], /--coder/],
  ])('%s', async (_, args, message) => {
    const { code, err } = await bitassay('encode', at('events.log'), '-o', at('out'), ...args);
    expect(code).toBe(exitCodes.badInput);
    expect(err).toMatch(message);
    expect(existsSync(at('out'))).toBe(false);
  });

  it('a file that is missing, or a folder, and names it', async () => {
    for (const name of ['nothing', '.']) {
      const { code, err } = await bitassay('encode', at(name), '-o', at('out'), '--coder', 'fixed');
      expect(code).toBe(exitCodes.badInput);
      expect(err).toContain(at(name));
    }
    const { code } = await bitassay('encode', at('events.log'), '-o', folder, '--coder', 'fixed');
    expect(code).toBe(exitCodes.badInput);
  });

  it('to write what decodes to something else, or not at all, as a bug of its own', async () => {
    const args = ['encode', at('events.log'), '-o', at('out'), '--coder', 'fixed'];
    const header = { contentBytes: 3 } as ContainerHeader;
    vi.mocked(unpackContainer).mockReturnValueOnce({ content: log.with(7, 0), header });
    const different = await bitassay(...args);
    expect(different.code).toBe(exitCodes.ownBug);
    expect(different.err).toMatch(/decodes to something else; no file was written.*report it/s);
    vi.mocked(unpackContainer).mockImplementationOnce(() => {
      throw new CorruptStreamError('the padding of a message is not zeros');
    });
    const broken = await bitassay(...args);
    expect(broken.code).toBe(exitCodes.ownBug);
    expect(broken.err).toContain('the padding of a message is not zeros');
    expect(readdirSync(folder)).toEqual(['events.log']);
  });
});

describe('decode refuses', () => {
  beforeEach(async () => {
    writeFileSync(at('events.log'), log);
    await bitassay('encode', at('events.log'), '-o', at('events.basy'), '--coder', 'huffman');
  });

  it.each([
    ['another file', () => log, /no file of bitassay encode/],
    ['a cut file', (b: Buffer) => b.subarray(0, -1), /was cut/],
    ['a longer file', (b: Buffer) => Buffer.concat([b, b]), /after the end/],
    ['an altered header', (b: Buffer) => b.with(20, b[20] ^ 4), /header does not match/],
    ['an altered body', (b: Buffer) => b.with(-5, b.at(-5)! ^ 4), /do not match their checksum/],
    ['an empty file', () => Buffer.alloc(0), /an empty file/],
  ] as [string, (bytes: Buffer) => Uint8Array, RegExp][])(
    '%s, naming it',
    async (_, harm, message) => {
      writeFileSync(at('harmed.basy'), harm(readFileSync(at('events.basy'))));
      const { code, err } = await bitassay('decode', at('harmed.basy'), '-o', at('out'));
      expect(code).toBe(exitCodes.badInput);
      expect(err).toMatch(message);
      expect(err).toContain(at('harmed.basy'));
      expect(existsSync(at('out'))).toBe(false);
    },
  );

  it('more content than --limit, at its edge', async () => {
    const limited = (limit: number) =>
      bitassay('decode', at('events.basy'), '-o', at('out'), '--limit', String(limit));
    const refused = await limited(log.length - 1);
    expect(refused.code).toBe(exitCodes.badInput);
    expect(refused.err).toContain('more content than allowed');
    expect((await limited(log.length)).code).toBe(0);
  });

  it('a limit that is no number', async () => {
    const args = ['decode', at('events.basy'), '-o', at('out'), '--limit', '3kB'];
    const { code, err } = await bitassay(...args);
    expect(code).toBe(exitCodes.badInput);
    expect(err).toContain('whole number of bytes');
  });
});
