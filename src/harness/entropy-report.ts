import type { ContextScope } from '../models/context-counts.ts';
import type { CorpusData } from './corpus-data.ts';
import { CorpusFloors } from './corpus-floors.ts';
import { corpusRecordOf } from './corpus-record.ts';
import { Interrupted, pauseWith, type RunHooks } from './pause.ts';
import type { RunRecord } from './run-record.ts';

/** The `corpora` and `entropy` parts of a run record, without any cell. */
export interface EntropyReport {
  readonly corpora: RunRecord['corpora'];
  readonly entropy: RunRecord['entropy'];
  /** Names of corpora whose band has no ceiling that was run. */
  readonly withoutCeilings: readonly string[];
  readonly partial: boolean;
}

/** Above this many symbols no adaptive coder is run for a ceiling: it would take minutes and gigabytes. */
const MOST_SYMBOLS_RUN = 2 ** 25;

/** Entropies and floors of corpora, within messages and, where there are several, also running on over their ends. */
export async function entropyReport(
  corpora: readonly CorpusData[],
  options: { readonly upto: number; readonly rough: boolean },
  hooks: RunHooks = {},
): Promise<EntropyReport> {
  const entropy: RunRecord['entropy'] = [];
  const withoutCeilings: string[] = [];
  let partial = false;
  let cellsDone = 0;
  for (const corpus of corpora) {
    const run = !options.rough && corpus.test.symbols.length <= MOST_SYMBOLS_RUN;
    if (!run) withoutCeilings.push(corpus.name);
    const scopes: ContextScope[] =
      corpus.test.messageEnds.length > 1 ? ['message', 'running'] : ['message'];
    const floors = new CorpusFloors(corpus);
    const pause = pauseWith(hooks, () => ({
      cellsDone,
      cellsTotal: corpora.length,
      current: corpus.name,
    }));
    try {
      await floors.build({ scopes, upto: options.upto, useful: run, ceilings: [], run }, pause);
    } catch (error) {
      if (!(error instanceof Interrupted)) throw error;
      partial = true;
      break;
    }
    entropy.push(...floors.records());
    cellsDone++;
  }
  return { corpora: corpora.map(corpusRecordOf), entropy, withoutCeilings, partial };
}
