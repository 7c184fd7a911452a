import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { BugError, EnvironmentError, InputError, LimitError } from '../../src/errors/errors.ts';
import { explainFileError } from '../../src/errors/fs-faults.ts';

function systemError(code: string): Error {
  return Object.assign(new Error(`${code}: as the system says it, open`), { code });
}

it.each([
  ['ENOENT', InputError],
  ['ENOTDIR', InputError],
  ['EISDIR', InputError],
  ['EACCES', InputError],
  ['EPERM', InputError],
  ['ENOSPC', EnvironmentError],
  ['EDQUOT', EnvironmentError],
  ['EROFS', EnvironmentError],
  ['ENOMEM', EnvironmentError],
  ['EMFILE', EnvironmentError],
  ['EWHATEVER', EnvironmentError],
  ['ERR_FS_FILE_TOO_LARGE', LimitError],
  ['ERR_SOMETHING_OF_NODE', BugError],
])('%s names the file and keeps its cause', (code, kind) => {
  const cause = systemError(code);
  const error = explainFileError(cause, 'logs/events.log');
  expect(error).toBeInstanceOf(kind);
  expect(error.message).toMatch(/^logs\/events\.log: \S/);
  expect(error.where.file).toBe('logs/events.log');
  expect(error.cause).toBe(cause);
});

it('hands back an error of this program as it is', () => {
  const own = new LimitError('enough');
  expect(explainFileError(own, 'x')).toBe(own);
});

it('takes anything that can be thrown', () => {
  expect(explainFileError(new TypeError('x is undefined'), 'f')).toBeInstanceOf(BugError);
  expect(explainFileError('a text', 'f').message).toBe('f: a text');
});

it('explains what the system really says', () => {
  const folder = mkdtempSync(join(tmpdir(), 'bitassay-faults-'));
  try {
    writeFileSync(join(folder, 'file'), '');
    const kinds = [
      [join(folder, 'nothing'), /no such file/],
      [folder, /a folder, not a file/],
      [join(folder, 'file', 'inside'), /a file, not a folder/],
      [`${folder}/\0`, /no possible file name/],
      [join(folder, 'long'.repeat(100)), /too long/],
    ] as const;
    for (const [path, message] of kinds) {
      let thrown: unknown;
      try {
        readFileSync(path);
      } catch (error) {
        thrown = error;
      }
      const explained = explainFileError(thrown, path);
      expect(explained).toBeInstanceOf(InputError);
      expect(explained.message).toMatch(message);
    }
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
});
