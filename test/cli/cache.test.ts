import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { CacheStore } from '../../src/harness/cache-store.ts';
import { builtFile } from '../harness/built.ts';

const main = fileURLToPath(builtFile('cli/main.js'));

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-cache-command-'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function cache(place: string, ...args: string[]) {
  const { status, stdout, stderr } = spawnSync(process.execPath, [main, 'cache', ...args], {
    encoding: 'utf8',
    env: { ...process.env, BITASSAY_CACHE: place },
  });
  return { code: status, out: stdout, err: stderr };
}

describe('bitassay cache', () => {
  it('shows where the cache is and what is in it, and clears it', async () => {
    const store = new CacheStore(folder);
    for (const key of ['a', 'b', 'c']) await store.put(key.repeat(64), new Uint8Array(1000));
    const { bytes } = store.size();
    const facts = (entries: number, size: number) => ({
      folder,
      entries,
      bytes: size,
      most_bytes: 2 ** 30,
    });
    const shown = cache(folder, '--json');
    expect(shown.code, shown.err).toBe(0);
    expect(JSON.parse(shown.out)).toEqual(facts(3, bytes));
    expect(cache(folder).out).toContain(folder);
    expect(cache(folder, '--clear').out).toMatch(/^3 entries removed/);
    expect(JSON.parse(cache(folder, '--json').out)).toEqual(facts(0, 0));
  });

  it('is empty where nothing was ever kept, and where there is a file in its place', () => {
    expect(JSON.parse(cache(join(folder, 'none'), '--json').out)).toMatchObject({ entries: 0 });
    const file = join(folder, 'file');
    writeFileSync(file, 'not a folder');
    expect(cache(file, '--json').code).toBe(0);
  });
});
