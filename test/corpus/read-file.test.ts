import { chmod, mkdir, mkdtemp, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { inputFileBytes, readInputFile } from '../../src/corpus/read-file.ts';
import { InputError } from '../../src/errors/errors.ts';

let folder: string;

beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'bitassay-read-'));
  await chmod(folder, 0o755);
  await writeFile(join(folder, 'telemetry.bin'), 'abc');
  await writeFile(join(folder, 'empty.bin'), '');
  await writeFile(join(folder, 'locked.bin'), 'abc');
  await chmod(join(folder, 'locked.bin'), 0o000);
  await mkdir(join(folder, 'logs'));
});
afterAll(() => rm(folder, { recursive: true }));

/** Runs without the right to read everything, which root has. */
async function asNobody<T>(run: () => Promise<T>): Promise<T> {
  const self = process.geteuid?.();
  if (self !== 0 || process.seteuid === undefined) return run();
  process.seteuid(65534);
  try {
    return await run();
  } finally {
    process.seteuid(self);
  }
}

const readers = [
  ['readInputFile', readInputFile],
  ['inputFileBytes', inputFileBytes],
] as const;

describe.each(readers)('%s', (_, read) => {
  const refusal = async (name: string): Promise<InputError> => {
    const error = await read(join(folder, name), name).then(
      () => undefined,
      (e: unknown) => e,
    );
    expect(error).toBeInstanceOf(InputError);
    return error as InputError;
  };

  test('a missing file is named, with its neighbour', async () => {
    const error = await refusal('telemetri.bin');
    expect(error.message).toBe('telemetri.bin: there is no such file or folder');
    expect(error.where.advice).toBe('In the same folder there is telemetry.bin.');
    expect((await refusal('absent/x')).message).toContain('no such file or folder');
  });

  test('a path through a file does not exist', async () => {
    expect((await refusal('telemetry.bin/x')).message).toContain('is a file, not a folder');
  });

  test('a folder is no file', async () => {
    expect((await refusal('logs')).message).toContain('is a folder');
  });

  test('an empty file is refused', async () => {
    expect((await refusal('empty.bin')).message).toBe('empty.bin is empty');
  });
});

test('a file that may not be read is the caller’s to mend', async () => {
  const path = join(folder, 'locked.bin');
  const error: unknown = await asNobody(() => readInputFile(path, 'locked.bin')).catch((e) => e);
  expect(error).toBeInstanceOf(InputError);
  expect((error as InputError).message).toBe('locked.bin: no permission');
  expect((error as InputError).where).toMatchObject({ file: 'locked.bin' });
});

test('whole contents come back as a plain byte array', async () => {
  const bytes = await readInputFile(join(folder, 'telemetry.bin'), 'telemetry.bin');
  expect(bytes).toStrictEqual(Uint8Array.of(97, 98, 99));
  expect(await inputFileBytes(join(folder, 'telemetry.bin'), 'telemetry.bin')).toBe(3);
});
