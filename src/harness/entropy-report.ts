import { driftOf } from '../entropy/drift.ts';
import { sampleEvenly } from '../entropy/sample.ts';
import type { ContextScope } from '../models/context-counts.ts';
import type { CorpusData } from './corpus-data.ts';
import { CorpusFloors } from './corpus-floors.ts';
import { corpusRecordOf } from './corpus-record.ts';
import { driftRecord } from './entropy-record.ts';
import { entropySurvey, type SurveyOptions } from './entropy-survey.ts';
import { Interrupted, pauseWith, type RunHooks } from './pause.ts';
import type { EntropyRecord, RunRecord } from './run-record.ts';

/** The `corpora` and `entropy` parts of a run record, without any cell. */
export interface EntropyReport {
  readonly corpora: RunRecord['corpora'];
  /** For each corpus one entry for contexts within messages, and, where there are several, one for contexts that run on. */
  readonly entropy: RunRecord['entropy'];
  readonly partial: boolean;
}

export interface EntropyReportOptions extends SurveyOptions {
  readonly upto: number;
}

/**
 * More symbols are sampled: counting them takes up to 17 bytes each, and adaptive coders would take minutes and gigabytes.
 * A coder that sees only a sample gives no bound on the whole, so none is run on one.
 */
const MOST_SYMBOLS = 2 ** 25;

/** Entropies, floors and what there is to say of change and of how much data is needed, for each corpus. */
export async function entropyReport(
  corpora: readonly CorpusData[],
  options: EntropyReportOptions,
  hooks: RunHooks = {},
): Promise<EntropyReport> {
  const entropy: EntropyRecord[] = [];
  let partial = false;
  let cellsDone = 0;
  for (const corpus of corpora) {
    const pause = pauseWith(hooks, () => ({
      cellsDone,
      cellsTotal: corpora.length,
      current: corpus.name,
    }));
    try {
      entropy.push(...(await reportOf(corpus, options, pause)));
    } catch (error) {
      if (!(error instanceof Interrupted)) throw error;
      partial = true;
      break;
    }
    cellsDone++;
  }
  return { corpora: corpora.map(corpusRecordOf), entropy, partial };
}

async function reportOf(
  whole: CorpusData,
  options: EntropyReportOptions,
  pause: () => Promise<void>,
): Promise<EntropyRecord[]> {
  if (whole.test.symbols.length === 0) return [];
  const corpus = sampled(whole);
  const isSample = corpus !== whole;
  // What a coder needs for a part is no bound on the whole.
  const isPart = isSample || whole.sample !== undefined;
  const run = !options.rough && !isPart;
  const scopes: ContextScope[] =
    whole.fill !== undefined
      ? ['running']
      : whole.test.messageEnds.length > (whole.sample === undefined ? 1 : whole.testFiles.length)
        ? ['message', 'running']
        : ['message'];
  await pause();
  const drift = driftOf(corpus.test, { contexts: scopes[0] });
  const floors = new CorpusFloors(corpus);
  await floors.build(
    {
      scopes,
      upto: options.upto,
      useful: run,
      ceilings: [],
      run,
      ctw: run,
      all: options.all,
      changes: drift.change !== undefined,
    },
    pause,
  );
  const survey = await entropySurvey(corpus, floors.entropyOf(scopes[0])!, options, pause);
  return floors.records().map((record, i) => ({
    ...record,
    ...(isSample ? sampleKeys(whole, corpus, record) : {}),
    ...(i === 0 ? { drift: driftRecord(drift), ...survey } : {}),
  }));
}

/** What a record of a sample says besides. Its pieces are no messages of the corpus, though they are counted as such. */
function sampleKeys(
  whole: CorpusData,
  sample: CorpusData,
  { orders }: EntropyRecord,
): Pick<EntropyRecord, 'sampled_symbols' | 'orders'> {
  const named = whole.test.messageEnds.length >= sample.test.messageEnds.length;
  return {
    sampled_symbols: sample.test.symbols.length,
    orders: orders.map((order) =>
      named ? order : { ...order, interval_unit: `${sample.test.messageEnds.length} pieces` },
    ),
  };
}

/** The corpus with no more symbols than are looked at; itself where it is small enough. */
function sampled(corpus: CorpusData): CorpusData {
  const test = sampleEvenly(corpus.test, MOST_SYMBOLS);
  const train = corpus.train && sampleEvenly(corpus.train, MOST_SYMBOLS);
  if (test === corpus.test && train === corpus.train) return corpus;
  return { ...corpus, test, ...(train === undefined ? {} : { train }) };
}
