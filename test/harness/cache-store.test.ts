import { mkdtempSync, readdirSync, readFileSync, rmSync, utimesSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { type CacheSurroundings, cacheFolder } from '../../src/harness/cache-folder.ts';
import { CacheStore } from '../../src/harness/cache-store.ts';

let folder: string;
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'bitassay-store-'));
});
afterEach(() => rmSync(folder, { recursive: true, force: true }));

const keyOf = (i: number): string => i.toString(16).padStart(64, '0');

function filesBelow(path: string): string[] {
  return readdirSync(path, { recursive: true, encoding: 'utf8' })
    .filter((name) => name.endsWith('.figures'))
    .map((name) => join(path, name))
    .sort();
}

describe('the folder of the cache', () => {
  const home = () => '/home/someone';
  const on = (platform: NodeJS.Platform, env: CacheSurroundings['env']) =>
    cacheFolder({ platform, env, home });

  it('follows the platform', () => {
    expect(on('linux', {})).toBe('/home/someone/.cache/bitassay');
    expect(on('linux', { XDG_CACHE_HOME: '/var/cache/mine' })).toBe('/var/cache/mine/bitassay');
    expect(on('darwin', { XDG_CACHE_HOME: '/elsewhere' })).toBe(
      '/home/someone/Library/Caches/bitassay',
    );
    expect(on('win32', { LOCALAPPDATA: '/local' })).toBe(join('/local', 'bitassay', 'cache'));
  });

  it('ignores an XDG_CACHE_HOME that is not absolute, as the XDG Base Directory Specification 0.8 asks', () => {
    expect(on('linux', { XDG_CACHE_HOME: 'cache' })).toBe('/home/someone/.cache/bitassay');
  });

  it('is what BITASSAY_CACHE says, everywhere', () => {
    for (const platform of ['linux', 'darwin', 'win32'] as const)
      expect(on(platform, { BITASSAY_CACHE: '/mine', XDG_CACHE_HOME: '/x' })).toBe('/mine');
  });

  it('is none where the user has no home', () => {
    const homeless = (): string => {
      throw new Error('no such user');
    };
    expect(cacheFolder({ platform: 'linux', env: {}, home: homeless })).toBeUndefined();
    expect(cacheFolder({ platform: 'linux', env: {}, home: () => '' })).toBeUndefined();
  });
});

describe('the cache', () => {
  const value = {
    bits: Float64Array.of(1.5, Number.POSITIVE_INFINITY),
    text: 'é',
    none: undefined,
  };

  it('gives back what was left in it, also to another run', async () => {
    await new CacheStore(folder).put(keyOf(1), value);
    const found = await new CacheStore(folder).get(keyOf(1));
    expect(found).toEqual(value);
    expect(await new CacheStore(folder).get(keyOf(2))).toBeUndefined();
  });

  it('gives back thousands of entries that are asked for at once', async () => {
    const store = new CacheStore(folder);
    for (let i = 0; i < 3000; i++) await store.put(keyOf(i), i);
    const found = await Promise.all(Array.from({ length: 3000 }, (_, i) => store.get(keyOf(i))));
    expect(found).toEqual(Array.from({ length: 3000 }, (_, i) => i));
  });

  it('takes no entry that was damaged anywhere, and removes it', async () => {
    const store = new CacheStore(folder);
    await store.put(keyOf(1), value);
    const [path] = filesBelow(folder);
    const sound = readFileSync(path);
    for (let at = 0; at < sound.length; at++) {
      const damaged = Buffer.from(sound);
      damaged[at] ^= 1 << (at % 8);
      writeFileSync(path, damaged);
      expect(await store.get(keyOf(1)), `byte ${at}`).toBeUndefined();
      expect(filesBelow(folder)).toEqual([]);
    }
    for (const length of [0, 1, 17, 48, 49, sound.length - 1]) {
      writeFileSync(path, sound.subarray(0, length));
      expect(await store.get(keyOf(1)), `${length} bytes`).toBeUndefined();
    }
    writeFileSync(path, sound);
    expect(await store.get(keyOf(1))).toEqual(value);
  });

  it('takes no sound entry that lies in the place of another', async () => {
    const store = new CacheStore(folder);
    await store.put(keyOf(1), value);
    await store.put(keyOf(2), { other: true });
    const [first, second] = filesBelow(folder);
    writeFileSync(second, readFileSync(first));
    expect(await store.get(keyOf(2))).toBeUndefined();
  });

  it('lets go what was used longest ago', async () => {
    const store = new CacheStore(folder);
    for (let i = 0; i < 6; i++) await store.put(keyOf(i), { i, filler: new Uint8Array(1000) });
    filesBelow(folder).forEach((path, i) => {
      utimesSync(path, 1000 + i, 1000 + i);
    });
    // Used again, so no longer the oldest.
    expect(await store.get(keyOf(0))).toBeDefined();
    const each = store.size().bytes / 6;
    await store.trim(3.5 * each);
    expect(store.size().entries).toBe(3);
    const left = await Promise.all([0, 1, 2, 3, 4, 5].map((i) => store.get(keyOf(i))));
    expect(left.map((entry) => entry !== undefined)).toEqual([
      true,
      false,
      false,
      false,
      true,
      true,
    ]);
  });

  it('clears its own entries and nothing else of a folder that was named for it', async () => {
    const mine = join(folder, 'letter.txt');
    writeFileSync(mine, 'not yours');
    const store = new CacheStore(folder);
    await store.put(keyOf(1), value);
    await store.clear();
    expect(store.size()).toEqual({ entries: 0, bytes: 0 });
    expect(readFileSync(mine, 'utf8')).toBe('not yours');
  });

  it('says why nothing is kept where it cannot write, and fails nobody', async () => {
    const blocked = join(folder, 'blocked');
    writeFileSync(blocked, 'a file where a folder should be');
    const store = new CacheStore(blocked);
    await store.put(keyOf(1), value);
    expect(store.trouble).toBeTruthy();
    expect(await store.get(keyOf(1))).toBeUndefined();
    expect(store.size()).toEqual({ entries: 0, bytes: 0 });
    await store.trim();
  });
});
