import type { ContextScope } from '../models/context-counts.ts';
import { CorpusFloors } from './corpus-floors.ts';
import { corpusRecordOf } from './corpus-record.ts';
import type { EntropyReport } from './entropy-report.ts';
import { Interrupted, pauseWith, type RunHooks } from './pause.ts';
import type { EntropyRecord } from './run-record.ts';
import { countStreamed, highestOrderOf } from './stream-counts.ts';
import type { StreamedData } from './stream-data.ts';

/**
 * Entropies and floors of corpora that are read in pieces, of as many orders as can be counted so: no coder is run, no order
 * tested for use, no change along the data looked for.
 */
export async function streamedEntropyReport(
  corpora: readonly StreamedData[],
  options: { readonly upto: number; readonly all: boolean },
  hooks: RunHooks = {},
): Promise<EntropyReport> {
  const entropy: EntropyRecord[] = [];
  let partial = false;
  let cellsDone = 0;
  for (const data of corpora) {
    const { name, test } = data.shape;
    const pause = pauseWith(hooks, () => ({
      cellsDone,
      cellsTotal: corpora.length,
      current: name,
    }));
    const upto = Math.min(options.upto, highestOrderOf(data));
    const scopes: ContextScope[] =
      test.messageEnds.length > 1 ? ['message', 'running'] : ['message'];
    const counted = new Map();
    try {
      for (const scope of scopes) {
        const found = await countStreamed(data, scope, { upto, all: options.all }, pause);
        counted.set(scope, found.entropy);
      }
    } catch (error) {
      if (!(error instanceof Interrupted)) throw error;
      partial = true;
      break;
    }
    const floors = new CorpusFloors(data.shape, counted);
    await floors.build({ scopes, upto, useful: false, ceilings: [], run: false }, async () => {});
    entropy.push(...floors.records());
    cellsDone++;
  }
  return {
    corpora: corpora.map(({ shape }) => ({ ...corpusRecordOf(shape), in_pieces: true as const })),
    entropy,
    partial,
  };
}
