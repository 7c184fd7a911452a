import { Command } from 'commander';
import { afterEach, describe, expect, it, vi } from 'vitest';
import { CommandEnd, endingOf, exitCodes, runCommand } from '../../src/cli/exit.ts';
import {
  BugError,
  CorruptStreamError,
  EnvironmentError,
  InputError,
  LimitError,
  NotYetError,
  PromiseError,
} from '../../src/errors/errors.ts';

afterEach(() => vi.unstubAllEnvs());

function systemError(code: string): NodeJS.ErrnoException {
  return Object.assign(new Error(`${code}: something, write`), { code });
}

describe('exit codes', () => {
  // The numbers that the design promises to scripts and build servers.
  it.each([
    ['bad input', new InputError('x'), 2],
    ['something later', new NotYetError('x'), 2],
    ['a corrupt file', new CorruptStreamError('x'), 2],
    ['a limit', new LimitError('x'), 2],
    ['the environment', new EnvironmentError('x'), 4],
    ['a full disk', systemError('ENOSPC'), 4],
    ['a used-up quota', systemError('EDQUOT'), 4],
    ['a read-only file system', systemError('EROFS'), 4],
    ['no memory', systemError('ENOMEM'), 4],
    ['no memory, as the engine says it', new RangeError('Array buffer allocation failed'), 4],
    ['a bug', new BugError('x'), 70],
    ['a broken promise', new PromiseError('x'), 70],
    ['an error nobody thought of', new TypeError('x is not a function'), 70],
    ['a thrown text', 'x', 70],
    ['an interruption', new DOMException('stop', 'AbortError'), 130],
    ['a reader that has seen enough', systemError('EPIPE'), 0],
    ['a command whose answer is no', new CommandEnd(exitCodes.answerIsNo), 1],
    ['a command with failed cells', new CommandEnd(exitCodes.cellFailed), 3],
  ])('%s', (_, thrown, code) => {
    expect(endingOf(thrown).code).toBe(code);
  });

  it('come back from a command, and 0 from one that does its work', async () => {
    const said: string[] = [];
    const say = (text: string) => said.push(text);
    expect(await runCommand(() => Promise.resolve('whatever'), say)).toBe(0);
    expect(said).toEqual([]);
    const fail = () => Promise.reject(new InputError('the plan has no title'));
    expect(await runCommand(fail, say)).toBe(2);
    expect(said).toEqual(['bitassay: the plan has no title']);
  });

  it('are 2 for a command line that cannot be read, 0 for help that was asked for', async () => {
    const run = async (...args: string[]) => {
      const program = new Command('bitassay').exitOverride().version('1');
      program.configureOutput({ writeOut: () => {}, writeErr: () => {} });
      program
        .command('look')
        .argument('<file>')
        .action(() => {});
      for (const command of program.commands) {
        command.exitOverride().configureOutput({ writeOut: () => {}, writeErr: () => {} });
      }
      const said: string[] = [];
      const code = await runCommand(
        () => program.parseAsync(args, { from: 'user' }),
        (text) => said.push(text),
      );
      // Commander has said what there is to say.
      expect(said).toEqual([]);
      return code;
    };
    expect(await run('look', 'file')).toBe(0);
    expect(await run('--help')).toBe(0);
    expect(await run('look', '--help')).toBe(0);
    expect(await run('--version')).toBe(0);
    expect(await run('look')).toBe(2);
    expect(await run('loook', 'file')).toBe(2);
    expect(await run('look', 'file', '--fast')).toBe(2);
  });
});

describe('the paragraph', () => {
  it('says what was wrong, where, what was expected, what was met and what to do', () => {
    const error = new InputError('the column is missing', {
      file: 'plan.yaml',
      line: 3,
      expected: 'temperature',
      got: 'temprature',
      advice: 'Did you mean temperature?',
    });
    expect(endingOf(error).text).toBe(
      [
        'bitassay: the column is missing',
        '  where: plan.yaml, line 3',
        '  expected: temperature',
        '  got: temprature',
        '  Did you mean temperature?',
      ].join('\n'),
    );
  });

  it('does not say the file twice', () => {
    const error = new InputError('events.log: this is empty', { file: 'events.log' });
    expect(endingOf(error).text).toBe('bitassay: events.log: this is empty');
  });

  it('never has a blank line or a stack, whatever was thrown', () => {
    for (const thrown of [new BugError('x'), new TypeError('y'), systemError('ENOSPC')]) {
      const text = endingOf(thrown).text!;
      expect(text).not.toMatch(/\n\n/);
      expect(text).not.toContain('exit.test.ts');
    }
  });

  it('asks for a report of a bug, and shows the stack to whoever wants to debug', () => {
    expect(endingOf(new TypeError('y')).text).toMatch(/fault of bitassay itself: y\n.*report it/s);
    vi.stubEnv('BITASSAY_DEBUG', '1');
    expect(endingOf(new TypeError('y')).text).toContain('exit.test.ts');
    expect(endingOf(new InputError('y')).text).not.toContain('exit.test.ts');
  });

  it('is left out where nothing is to be said', () => {
    expect(endingOf(systemError('EPIPE')).text).toBeUndefined();
    expect(endingOf(new CommandEnd(exitCodes.cellFailed)).text).toBeUndefined();
  });
});
