import type { Comparison } from '../compare/compare-cells.ts';
import type { RunRecord } from '../harness/run-record.ts';
import { corpusSection } from './corpus-section.ts';
import { deviceNote } from './cost-lines.ts';
import { countText, rateText, sizeText, symbolNoun, wrapText } from './figures.ts';
import { cellPhrase } from './floor-lines.ts';
import { resetLines } from './loss-lines.ts';

export interface RunScreenOptions {
  readonly columns: number;
  readonly comparisons: readonly Comparison[];
  readonly next: string;
}

function comparisonLines(record: RunRecord, corpus: string, options: RunScreenOptions): string[] {
  const own = options.comparisons.filter((c) => c.corpus === corpus);
  if (own.length === 0) return [];
  const phrase = (id: string): string => {
    const cell = record.cells.find((c) => c.id === id);
    return cell === undefined ? id : cellPhrase(cell);
  };
  const noun = symbolNoun(record.corpora.find((c) => c.name === corpus)?.symbols_as ?? '');
  const lines: string[] = [];
  const equal = own.filter((c) => !c.decided);
  const nearest = own.find((c) => c.decided);
  if (equal.length > 0) {
    lines.push(
      `= marks ${equal.length === 1 ? 'the cell' : `the ${equal.length} cells`} that this corpus cannot tell from the best (95 % paired bootstrap over ${own[0].units} ${own[0].unit}, each pair on its own).`,
    );
  }
  if (nearest !== undefined) {
    const { difference, low, high, units, unit } = nearest;
    lines.push(
      `${phrase(nearest.b)} needs ${rateText(difference)} bits/${noun} more than ${phrase(nearest.a)} (${rateText(low)} to ${rateText(high)}, over ${units} ${unit}).`,
    );
  }
  return lines.flatMap((line) => wrapText(line, options.columns - 1, ' '));
}

/** How the tables of the best shipped cell age, in one paragraph. */
function ageingLines(record: RunRecord, corpus: string, columns: number): string[] {
  const ageing = record.ageing?.find((a) => a.corpus === corpus);
  const cell = record.cells.find((c) => c.id === ageing?.cell);
  if (ageing === undefined || cell === undefined || ageing.segments.length < 2) return [];
  const noun = symbolNoun(record.corpora.find((c) => c.name === corpus)?.symbols_as ?? '');
  const first = ageing.segments[0];
  const last = ageing.segments[ageing.segments.length - 1];
  const tables = ageing.table_bits === undefined ? '' : ` (${sizeText(ageing.table_bits / 8)})`;
  const verdict =
    ageing.table_bits === undefined
      ? ''
      : ageing.pays_after === undefined
        ? ` Sending new tables${tables} would not pay within these data.`
        : ` Sending new tables${tables} pays within ${countText(ageing.pays_after)} symbols.`;
  return wrapText(
    `Ageing of ${cellPhrase(cell)}: ideal ${rateText(first.rate)} bits/${noun} right after the train part, ${rateText(last.rate)} at a distance of ${countText(last.distance)} symbols; retrained on all before, ${rateText(last.retrained_rate)} there.${verdict}`,
    columns - 1,
    ' ',
  );
}

/** Says that combinations were left out of corpora whose messages are filled. */
export function notFilledText(count: number): string {
  return `${countText(count)} combinations of tables and reset gave no cell: messages can be filled only where each decodes alone, under reset message or with shipped tables.`;
}

/** The screen of `bitassay run`: a section a corpus, then what the list left out. */
export function runScreen(record: RunRecord, options: RunScreenOptions): string {
  const lines: string[] = [` ${record.plan.title}`, ''];
  for (const corpus of record.corpora) {
    if (!record.cells.some((cell) => cell.corpus === corpus.name)) continue;
    const heading = `── ${corpus.name}: ${corpus.symbols_as}, ${corpus.messages_as}, lengths ${corpus.lengths} `;
    lines.push(heading + '─'.repeat(Math.max(0, options.columns - heading.length)), '');
    const equal = new Set(options.comparisons.filter((c) => !c.decided).map((c) => c.b));
    lines.push(
      ...corpusSection(record, corpus, {
        columns: options.columns,
        markOf: (id) => (equal.has(id) ? '=' : ' '),
      }),
      ...comparisonLines(record, corpus.name, options),
      ...resetLines(
        record.cells.filter((cell) => cell.corpus === corpus.name),
        symbolNoun(corpus.symbols_as),
      ).flatMap((line) => wrapText(line, options.columns - 1, ' ')),
      ...ageingLines(record, corpus.name, options.columns),
      '',
    );
  }
  const notes: string[] = [];
  if (record.cells.some((c) => c.encode !== undefined)) {
    notes.push(
      'Speed is the time of the pacer (deflate-huffman on the whole test part) by that of the cell, in the same round; above ×1 is faster.',
    );
  }
  if (record.plan.product !== undefined) notes.push(deviceNote(record.plan.product.device));
  if (record.plan.loss_rate !== undefined) {
    notes.push(
      `With ${Number((record.plan.loss_rate * 100).toPrecision(3))} % of the messages lost on the way, independently: % lost counts all messages that cannot be decoded then. Losses in bursts spoil fewer for each one lost. Whether that is tolerable, your link's own protection and standards decide.`,
    );
  }
  if (record.plan.bill_step_bytes !== undefined) {
    notes.push(
      `The link bills each message in steps of ${countText(record.plan.bill_step_bytes)} bytes: steps/unit is for each message of the source, or each unit where messages are filled.`,
    );
  }
  if (record.undeclared > 0) {
    notes.push(
      `${countText(record.undeclared)} combinations of tables and reset gave no cell, since the coder does not declare them.`,
    );
  }
  if (record.not_filled !== undefined) notes.push(notFilledText(record.not_filled));
  const failed = record.cells.filter((c) => !c.verified).length;
  if (failed > 0)
    notes.push(
      `${countText(failed)} of ${countText(record.cells.length)} cells failed and have no rate.`,
    );
  if (record.partial)
    notes.push('Interrupted: this record is partial; cells not reached are missing from it.');
  lines.push(...notes.flatMap((note) => wrapText(note, options.columns - 1, ' ')));
  lines.push(` Next: ${options.next}`, '');
  return lines.join('\n');
}
