import type { CalibrationRecord } from '../harness/calibrate-record.ts';
import { intervalSection, sourceSection } from './calibrate-interval-lines.ts';
import { changeSection, coderSection, estimatorSection } from './calibrate-other-lines.ts';
import { countText, wrapText } from './figures.ts';

export interface CalibrateScreenOptions {
  readonly columns: number;
}

/** Every broken promise in words. */
function missLines({ intervals, coders, changes }: CalibrationRecord): string[] {
  return [
    ...intervals
      .filter((line) => line.verdict === 'misses')
      .map(
        (l) => `${l.source}, ${countText(l.symbol_count)} symbols, order ${l.k}: ${l.verdict_text}`,
      ),
    ...coders
      .filter((line) => line.verdict === 'misses')
      .map(
        (l) =>
          `${l.source}, ${countText(l.symbol_count)} symbols, ${l.candidate}: ${l.verdict_text}`,
      ),
    ...changes
      .filter((line) => line.verdict === 'misses')
      .map(
        (l) =>
          `${l.source}, ${countText(l.symbol_count)} symbols, change found in ${l.verdict_text}`,
      ),
  ];
}

/** The screen of `bitassay calibrate`: what was promised, what is true, and a verdict on each line. */
export function calibrateScreen(
  record: CalibrationRecord,
  { columns }: CalibrateScreenOptions,
): string {
  const promises = record.intervals.length + record.coders.length + record.changes.length;
  const broken = missLines(record);
  return [
    ...wrapText(
      `${record.sources.length} ${record.sources.length === 1 ? 'source' : 'sources'} whose entropies are known by calculation; figures in bits per symbol. Drawn from the seed "${record.seed}": the same on every machine.`,
      columns - 1,
      ' ',
    ),
    '',
    ...sourceSection(record, columns),
    '',
    ...intervalSection(record, columns),
    '',
    ...estimatorSection(record, columns),
    ...coderSection(record, columns),
    ...changeSection(record, columns),
    ...(broken.length === 0
      ? [` ${countText(promises)} lines judged: no promise is broken.`]
      : [
          ` ${countText(promises)} lines judged: ${broken.length} ${broken.length === 1 ? 'promise is' : 'promises are'} broken.`,
          ...broken.flatMap((text) => wrapText(text, columns - 4, '   ')),
        ]),
    ...(record.partial ? [' Interrupted: only what was done until then is shown.'] : []),
    ...wrapText(
      'A figure from a sample, here or on your data, does not certify a safety link.',
      columns - 1,
      ' ',
    ),
    ' Next: bitassay entropy FILE',
    '',
  ].join('\n');
}
