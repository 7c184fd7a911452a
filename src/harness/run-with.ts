import { cacheFolder } from './cache-folder.ts';
import { CacheKeys, codeHash } from './cache-key.ts';
import { CacheStore } from './cache-store.ts';
import { CachedExecutor } from './cached-executor.ts';
import type { Executor } from './executor.ts';
import type { RunHooks } from './pause.ts';
import { cellsOf, type RunRequest, type RunResult, runAll } from './run-all.ts';
import { shareCorpora } from './shared-corpus.ts';
import { ThisThread } from './this-thread.ts';
import { WorkerPool, workerEntry } from './worker-pool.ts';

/** Below so many symbols workers take longer to start than they save. */
const QUICK_SYMBOLS = 2 ** 18;

/** Whether a request is done on this thread before workers would have started. */
export function isQuick({ corpora }: RunRequest): boolean {
  const symbols = corpora.reduce(
    (sum, { train, test }) => sum + test.symbols.length + (train?.symbols.length ?? 0),
    0,
  );
  return symbols < QUICK_SYMBOLS;
}

/** Where and how a run is done. */
export interface RunManner {
  /** Cells coded at a time; as many as suit the machine when absent. */
  readonly lanes?: number;
  /** Take nothing from the cache; what is computed is left there all the same. */
  readonly fresh?: boolean;
  /** Folder of the cache; the platform's when absent, none where false. */
  readonly cache?: string | false;
  /** Addresses of modules whose `coders` are coder entries besides the registry's. */
  readonly modules?: readonly string[];
  /** The entry of workers; the one beside this file when absent. */
  readonly entry?: URL;
}

export interface MannerResult extends RunResult {
  /** Cells whose bits came from the cache. */
  readonly cellsTaken: number;
  /** Why there was no cache, or nothing could be left there. */
  readonly cacheTrouble?: string;
}

/**
 * Runs a request in a pool of workers, with the cache: what the command `run` does. From the sources, which workers cannot
 * run, the work is done on this thread.
 */
export async function runWith(
  request: RunRequest,
  hooks: RunHooks = {},
  manner: RunManner = {},
): Promise<MannerResult> {
  const { modules = [] } = manner;
  const shared = { ...request, corpora: shareCorpora(request.corpora) };
  const workers = executorFor(shared, manner);
  const folder = manner.cache === false ? undefined : (manner.cache ?? cacheFolder());
  const store = folder === undefined ? undefined : new CacheStore(folder);
  const cached =
    store && new CachedExecutor(workers, store, new CacheKeys(codeHash(modules)), manner.fresh);
  try {
    const result = await runAll(shared, hooks, cached ?? workers);
    await store?.trim();
    const none = manner.cache === false ? undefined : 'this user has no folder for one';
    const trouble = store === undefined ? none : store.trouble;
    return {
      ...result,
      cellsTaken: cached?.cellsTaken ?? 0,
      ...(trouble === undefined ? {} : { cacheTrouble: trouble }),
    };
  } finally {
    await workers.close();
  }
}

function executorFor(request: RunRequest, manner: RunManner): Executor {
  const { lanes, modules, entry } = manner;
  const { budget } = request;
  if ((entry ?? workerEntry()) === undefined) return new ThisThread();
  const cells = cellsOf(request).cells.length;
  return new WorkerPool(request.corpora, {
    mostLanes: Math.max(1, cells),
    ...(budget === undefined ? {} : { budget }),
    ...(lanes === undefined ? {} : { lanes }),
    ...(modules === undefined ? {} : { modules }),
    ...(entry === undefined ? {} : { entry }),
  });
}
