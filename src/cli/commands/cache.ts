import type { Command } from 'commander';
import { InputError } from '../../errors/errors.ts';
import { explainFileError } from '../../errors/fs-faults.ts';
import { cacheFolder } from '../../harness/cache-folder.ts';
import { CacheStore, MOST_CACHE_BYTES } from '../../harness/cache-store.ts';
import { countText, sizeText } from '../../report/figures.ts';
import { writeStandardOutput } from '../output.ts';

interface CacheOptions {
  readonly clear?: boolean;
  readonly json?: boolean;
}

async function showCache(options: CacheOptions): Promise<void> {
  const folder = cacheFolder();
  if (folder === undefined) {
    throw new InputError('this user has no folder for a cache', {
      advice: 'Set BITASSAY_CACHE to one.',
    });
  }
  const store = new CacheStore(folder);
  const before = store.size();
  if (options.clear) {
    try {
      await store.clear();
    } catch (error) {
      throw explainFileError(error, folder);
    }
  }
  const { entries, bytes } = options.clear ? store.size() : before;
  if (options.json) {
    const facts = { folder, entries, bytes, most_bytes: MOST_CACHE_BYTES };
    await writeStandardOutput(`${JSON.stringify(facts, null, 1)}\n`);
    return;
  }
  const removed = options.clear
    ? [`${countText(before.entries)} entries removed, ${sizeText(before.bytes)}`]
    : [];
  const lines = [
    ...removed,
    ` folder   ${folder}`,
    ` entries  ${countText(entries)}`,
    ` size     ${sizeText(bytes)} of at most ${sizeText(MOST_CACHE_BYTES)}; those used longest ago go first`,
    '',
    'It holds figures of coded cells by hashes of data, candidate and code, and nothing of the data themselves.',
    ...(entries === 0
      ? []
      : ['bitassay cache --clear empties it: later runs code all cells anew.']),
  ];
  await writeStandardOutput(`${lines.join('\n')}\n`);
}

/** `bitassay cache`: what earlier runs left for later ones. */
export function registerCache(program: Command): void {
  program
    .command('cache')
    .summary('figures kept from earlier runs: where, how much; clear them')
    .description(
      'Shows the cache, in which runs keep what each cell came to, so that an interrupted run goes on where it ended.',
    )
    .option('--clear', 'remove all entries')
    .option('--json', 'print folder, entries and bytes')
    .addHelpText(
      'after',
      `
BITASSAY_CACHE names another folder than the platform's own for caches.

Examples:
  bitassay cache
  bitassay cache --clear`,
    )
    .action((options: CacheOptions) => showCache(options));
}
