import type { RunComparison } from '../compare/compare-run.ts';
import { partsOfId } from '../compare/contenders.ts';
import { curvesOf } from '../compare/curves.ts';
import { plainRun, variationOfCell } from '../compare/pooled-record.ts';
import type { RunRecord } from '../harness/run-record.ts';
import { comparisonLines } from './comparison-lines.ts';
import { corpusSection } from './corpus-section.ts';
import { deviceNote, someGrow } from './cost-lines.ts';
import { curveLines } from './curve-lines.ts';
import { damageLines } from './damage-lines.ts';
import { countText, rateText, sizeText, symbolNoun, wrapText } from './figures.ts';
import { cellPhrase } from './floor-lines.ts';
import { resetLines } from './loss-lines.ts';
import { readingLines } from './reading-lines.ts';
import { speedNotes } from './time-lines.ts';

export interface RunScreenOptions {
  readonly columns: number;
  /** Curves without marks beyond ASCII. */
  readonly ascii?: boolean;
  /** Of the same record. */
  readonly compared: RunComparison;
  readonly next: string;
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

/** Cells that failed and stand in no table, since the plan varies them. */
function failedVariations(record: RunRecord, corpus: string, columns: number): string[] {
  return record.cells
    .filter((cell) => cell.corpus === corpus && !cell.verified && variationOfCell(cell) !== '')
    .flatMap((cell) => wrapText(`! ${cell.id}: no rate. ${cell.failure ?? ''}`, columns));
}

/** Says that combinations were left out of corpora whose messages are filled. */
export function notFilledText(count: number): string {
  return `${countText(count)} combinations of tables and reset gave no cell: messages can be filled only where each decodes alone, under reset message or with shipped tables.`;
}

/** The screen of `bitassay run`: a section a corpus, then what the list left out. */
export function runScreen(record: RunRecord, options: RunScreenOptions): string {
  const lines: string[] = [` ${record.plan.title}`, ''];
  const { record: plain, foldRates } = plainRun(record);
  const rankOf = new Map(
    [...options.compared.ranks.rankOf].map(([id, rank]) => [partsOfId(id).base, rank]),
  );
  const curves = curvesOf(record);
  for (const corpus of record.corpora) {
    if (!record.cells.some((cell) => cell.corpus === corpus.name)) continue;
    const heading = `── ${corpus.name}: ${corpus.symbols_as}, ${corpus.messages_as}, lengths ${corpus.lengths} `;
    lines.push(heading + '─'.repeat(Math.max(0, options.columns - heading.length)), '');
    lines.push(
      ...corpusSection(plain, corpus, {
        columns: options.columns,
        rankOf,
        foldRates,
        messages: true,
        times: true,
        after: [
          ...curveLines(
            curves.filter((curve) => curve.corpus === corpus.name),
            {
              columns: options.columns,
              ascii: options.ascii === true,
              noun: symbolNoun(corpus.symbols_as),
            },
          ),
          ...failedVariations(record, corpus.name, options.columns),
        ],
      }),
      ...comparisonLines(record, corpus, options.compared, options.columns),
      ...resetLines(
        plain.cells.filter((cell) => cell.corpus === corpus.name),
        symbolNoun(corpus.symbols_as),
      ).flatMap((line) => wrapText(line, options.columns - 1, ' ')),
      ...ageingLines(record, corpus.name, options.columns),
      ...damageLines(
        plain.cells.filter((cell) => cell.corpus === corpus.name),
        symbolNoun(corpus.symbols_as),
        options.columns,
      ),
      ...readingLines(corpus, record.plan, options.columns),
      '',
    );
  }
  const notes: string[] = [];
  notes.push(...speedNotes(record.cells));
  if (record.plan.product !== undefined)
    notes.push(deviceNote(record.plan.product.device, someGrow(record.cells)));
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
