import { existsSync } from 'node:fs';
import { isAbsolute, relative, resolve, sep } from 'node:path';
import { glob, isDynamicPattern } from 'tinyglobby';
import { InputError } from '../errors/errors.ts';

export interface FoundFile {
  readonly absolutePath: string;
  /** From the base folder, with forward slashes; what records and messages show. */
  readonly path: string;
}

/**
 * The files behind paths and patterns, relative to `baseFolder`. Patterns come in their order, the files of one pattern in
 * the order of their names (by UTF-16 unit, so the same everywhere); a file found twice counts once, at its first place.
 * A path that exists is taken as it stands, whatever characters it holds.
 * @throws InputError when a pattern matches nothing; a plain path is returned unchecked
 */
export async function findFiles(
  patterns: readonly string[],
  baseFolder: string,
): Promise<FoundFile[]> {
  const found = new Map<string, FoundFile>();
  for (const pattern of patterns) {
    const absolute = resolve(baseFolder, pattern);
    let paths = [absolute];
    if (!existsSync(absolute) && isDynamicPattern(pattern)) {
      const slashes = isAbsolute(pattern) ? pattern : pattern.split(sep).join('/');
      const matches = await glob(slashes, {
        cwd: baseFolder,
        absolute: true,
        expandDirectories: false,
      });
      paths = matches.map((m) => resolve(m)).sort((a, b) => (a < b ? -1 : a > b ? 1 : 0));
      if (paths.length === 0) {
        throw new InputError(`no file matches ${JSON.stringify(pattern)}`, {
          expected: 'a pattern such as logs/*.log, relative to the folder of the plan',
          got: pattern,
          advice: `It was looked up in ${baseFolder === '' ? '.' : baseFolder}.`,
        });
      }
    }
    for (const path of paths) {
      if (found.has(path)) continue;
      const shown = relative(baseFolder, path).split(sep).join('/');
      found.set(path, { absolutePath: path, path: shown === '' ? pattern : shown });
    }
  }
  return [...found.values()];
}
