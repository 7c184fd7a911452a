import { homedir } from 'node:os';
import { isAbsolute, join } from 'node:path';

/** What the folder of the cache depends on. */
export interface CacheSurroundings {
  readonly platform: NodeJS.Platform;
  readonly env: Readonly<Record<string, string | undefined>>;
  /** Of the user; throws where there is none. */
  home(): string;
}

const HERE: CacheSurroundings = {
  platform: process.platform,
  env: process.env,
  home: homedir,
};

/**
 * Where figures of earlier runs are kept: `BITASSAY_CACHE`, or a folder of this program in the place that the platform has for
 * caches: `XDG_CACHE_HOME` or `~/.cache`; `~/Library/Caches`; `%LOCALAPPDATA%`.
 *
 * Source: XDG Base Directory Specification 0.8, "a path that is not absolute must be ignored".
 * @returns undefined where there is no such place
 */
export function cacheFolder({ platform, env, home }: CacheSurroundings = HERE): string | undefined {
  const { BITASSAY_CACHE: own, XDG_CACHE_HOME: xdg, LOCALAPPDATA: local } = env;
  if (own) return own;
  if (platform === 'win32' && local) return join(local, 'bitassay', 'cache');
  if (platform !== 'win32' && platform !== 'darwin' && xdg && isAbsolute(xdg))
    return join(xdg, 'bitassay');
  let user: string;
  try {
    user = home();
  } catch {
    return undefined;
  }
  if (!isAbsolute(user)) return undefined;
  if (platform === 'win32') return join(user, 'AppData', 'Local', 'bitassay', 'cache');
  if (platform === 'darwin') return join(user, 'Library', 'Caches', 'bitassay');
  return join(user, '.cache', 'bitassay');
}
