import { spawnSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { C_FLAGS } from './run-c.ts';

/** What one compiled end takes, as this machine's compiler sees it. */
export interface MeasuredEnd {
  /** Machine code, bytes. */
  readonly codeBytes: number;
  /** Constant tables, bytes. */
  readonly tableBytes: number;
  /** Stack, bytes: all functions' frames together, an upper bound since none calls itself. */
  readonly stackBytes: number;
}

function sectionBytes(sizes: string, section: string): number {
  let sum = 0;
  for (const line of sizes.split('\n')) {
    const [name, bytes] = line.trim().split(/\s+/);
    if (name === section || name?.startsWith(`${section}.`)) sum += Number(bytes);
  }
  return sum;
}

/**
 * Compiles one exported file with -Os and reads its sizes.
 * @param folder  where the exported files lie; object files are left there
 * @returns undefined where the compiler or `size` is missing or does not tell
 */
export function measureC(
  folder: string,
  source: string,
  compiler = 'gcc',
): MeasuredEnd | undefined {
  const object = source.replace(/\.c$/, '.sized.o');
  const compiled = spawnSync(
    compiler,
    [...C_FLAGS, '-Os', '-fstack-usage', '-c', source, '-o', object],
    { cwd: folder },
  );
  const sized = spawnSync('size', ['-A', object], { cwd: folder, encoding: 'utf8' });
  if (compiled.status !== 0 || sized.status !== 0) return undefined;
  let stack: string;
  try {
    stack = readFileSync(join(folder, object.replace(/\.o$/, '.su')), 'utf8');
  } catch {
    return undefined;
  }
  const frames = stack
    .trim()
    .split('\n')
    .map((line) => Number(line.split('\t')[1]));
  return {
    codeBytes: sectionBytes(sized.stdout, '.text'),
    tableBytes: sectionBytes(sized.stdout, '.rodata'),
    stackBytes: frames.reduce((sum, bytes) => sum + bytes, 0),
  };
}
