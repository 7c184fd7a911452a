import type { CorpusRecord, EntropyRecord } from '../harness/run-record.ts';
import { rateText } from './figures.ts';
import { countInText, paragraph } from './paragraph.ts';
import { heightRow } from './rate-plot.ts';

export interface DriftLinesOptions {
  readonly columns: number;
  readonly ascii: boolean;
  readonly noun: string;
}

type Drift = NonNullable<EntropyRecord['drift']>;

const inWords = (bits: number): string => rateText(bits, 3);

function switchSentence({ tests, change }: Drift, noun: string): string {
  if (change !== undefined) {
    const rates =
      change.before === undefined
        ? ''
        : `: order ${change.order} needs ${rateText(change.before)} bits/${noun} before and ${rateText(change.after!)} after; one shipped table costs ${inWords(change.one_table_cost!)} bits/${noun} beyond a table for each side`;
    const further = change.further
      ? ' A side changes again by itself, so it is more than one switch, or a gradual drift.'
      : '';
    return `The source changes, most of all near symbol ${countInText(change.at_symbol)} (within ${countInText(change.window_symbols)})${rates}.${further}`;
  }
  const tested = tests.filter((test) => test.found !== undefined);
  if (tested.length === 0) return `Changes: ${tests[0]?.reason ?? 'not tested'}.`;
  const orders = tested.map((test) => test.order).join(' and ');
  return `No switch found by ${tested.length === 1 ? 'order' : 'orders'} ${orders} (each false in 1 of 1000 sources that never change). A switch within the first or last twentieth of the data, or of longer contexts alone, is not seen.`;
}

function trainSentence(
  found: NonNullable<EntropyRecord['train_to_test']>,
  trains: boolean,
  noun: string,
): string {
  const { excess, standard_error: error } = found;
  const old = trains ? 'the end of the train part' : 'the first half';
  const priced = countInText(found.priced_symbols);
  const cost = `${inWords(Math.abs(excess))} ± ${inWords(error)} bits/${noun} ${excess < 0 ? 'less' : 'more'}`;
  const verdict =
    excess > 2 * error
      ? 'what was learned ages'
      : excess < -2 * error
        ? 'the data come back to what they were before'
        : 'no ageing beyond the standard error';
  return `From train to test, on ${priced} symbols: tables from ${old} (order ${found.order}, ${countInText(found.train_symbols)} symbols) cost ${cost} than tables of as many symbols just before; ${verdict}.`;
}

/** How the rate changes along the data, and what that costs shipped tables. */
export function driftLines(
  corpus: CorpusRecord,
  entropy: EntropyRecord,
  { columns, ascii, noun }: DriftLinesOptions,
): string[] {
  const { drift } = entropy;
  if (drift === undefined) return [];
  const lines = [' Change along the data', ''];
  const { windows } = drift;
  const paragraphs: string[] = [];
  if (windows !== undefined) {
    const least = Math.min(...windows.own);
    const largest = Math.max(...windows.own);
    const range =
      rateText(least) === rateText(largest)
        ? `${rateText(least)} bits/${noun}`
        : `${heightRow(windows.own, ascii)} ${rateText(least)} to ${rateText(largest)} bits/${noun}`;
    lines.push(
      ...paragraph(`${range} by order ${windows.order} in ${windows.own.length} windows`, columns),
    );
    paragraphs.push(
      `One table for all data costs ${inWords(Math.max(0, windows.one_table_cost))} ± ${inWords(windows.standard_error)} bits/${noun} beyond a table for each window, the tables' own bits apart.`,
    );
  }
  paragraphs.unshift(switchSentence(drift, noun));
  if (entropy.train_to_test !== undefined) {
    paragraphs.push(trainSentence(entropy.train_to_test, corpus.train_symbol_count > 0, noun));
  }
  for (const text of paragraphs) lines.push(...paragraph(text, columns));
  return lines;
}
