import { mkdtemp, readdir, rm, truncate, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { loadRun, readMessages } from '../../src/compare/read-messages.ts';
import { InputError } from '../../src/errors/errors.ts';
import { writeRunFolder } from '../../src/harness/run-folder.ts';
import { madeUpRun } from './made-up-run.ts';

let folder = '';
beforeEach(async () => {
  folder = await mkdtemp(join(tmpdir(), 'bitassay-run-'));
});
afterEach(() => rm(folder, { recursive: true }));

const run = () =>
  madeUpRun([
    { id: 'a/x@none/message', bits: [8, 16.5, 0], symbols: [1, 2, 0] },
    { id: 'a/y@shipped/message+fold=2', bits: [80], symbols: [3] },
    { id: 'a/z@none/message', bits: [80], more: { verified: false, failure: 'no rate' } },
    { id: 'b/x@none/message', bits: [4, 4], more: { message_count: 1, unit_count: 2 } },
  ]);

async function fault(path = folder): Promise<InputError> {
  const error = await loadRun(path).catch((e: unknown) => e);
  expect(error).toBeInstanceOf(InputError);
  return error as InputError;
}

/** The message file whose name begins so. */
async function fileOf(start: string): Promise<string> {
  const names = await readdir(join(folder, 'messages'));
  return join(folder, 'messages', names.find((name) => name.startsWith(start))!);
}

describe('loadRun', () => {
  it('reads back what a run left, by its folder and by its record', async () => {
    const { record, messages } = run();
    messages.delete('a/z@none/message');
    await writeRunFolder(folder, { record, messages });
    for (const path of [folder, join(folder, 'run.json')]) {
      const loaded = await loadRun(path);
      expect(loaded.record).toEqual(record);
      expect(new Map(loaded.messages)).toEqual(messages);
    }
  });

  it('refuses figures that are cut, strange or missing, and a folder that is none', async () => {
    await writeRunFolder(folder, run());
    const file = await fileOf('a_x@none');
    const reason = async () => (await fault()).message;
    await truncate(file, 47);
    expect((await fault()).where).toMatchObject({ file, got: '47 bytes' });
    await writeFile(file, new Uint8Array(64));
    expect(await reason()).toMatch(/do not belong to the record/);
    await writeFile(file, new Uint8Array(48).fill(255));
    expect(await reason()).toMatch(/no figures of messages/);
    await rm(file);
    expect(await reason()).toMatch(/no such file/);
    expect((await fault(join(folder, 'elsewhere'))).message).toMatch(/no such file/);
  });

  it('holds units where messages are filled', async () => {
    const { record, messages } = run();
    await writeRunFolder(folder, { record, messages });
    const read = await readMessages(folder, record);
    expect(read.get('b/x@none/message')!.bits.length).toBe(2);
  });
});
