import type { RunRecord } from '../harness/run-record.ts';
import { corpusSection } from './corpus-section.ts';
import { wrapText } from './figures.ts';
import { readingLines } from './reading-lines.ts';
import { notFilledText } from './run-screen.ts';

export interface TryScreenOptions {
  readonly columns: number;
  /** The command that the screen proposes next. */
  readonly next: string;
  /** What this trial cannot say, in one sentence. */
  readonly caution: string;
}

/** The screen of `bitassay try`. */
export function tryScreen(record: RunRecord, options: TryScreenOptions): string {
  const corpus = record.corpora[0];
  return [
    ...corpusSection(record, corpus, { columns: options.columns }),
    ...(record.not_filled === undefined
      ? []
      : wrapText(notFilledText(record.not_filled), options.columns - 1, ' ')),
    ...readingLines(corpus, record.plan, options.columns),
    ...wrapText(options.caution, options.columns - 1, ' '),
    ` Next: ${options.next}`,
    '',
  ].join('\n');
}
