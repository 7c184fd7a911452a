import type { RunChoice } from '../compare/choice.ts';
import type { CorpusChoice, NearMiss } from '../compare/choose-corpus.ts';
import type { RunRecord } from '../harness/run-record.ts';
import { figureText, limitWords, reviewLines } from './choose-review.ts';
import {
  acrossLines,
  breakEvenLines,
  dominatedLines,
  frontTable,
  roomTable,
  sensitivityLines,
} from './choose-tables.ts';
import { cellPhrase } from './floor-lines.ts';
import { paragraph } from './paragraph.ts';

export interface ChooseScreenOptions {
  readonly columns: number;
  /** The folder of the run, for the commands that are proposed. */
  readonly run: string;
}

/** What each goal is called where a choice is explained. */
const GOAL_WORDS = {
  'yearly cost': 'least cost of a year',
  'units per message': 'most units per message',
  rate: 'least rate',
} as const;

const END_WORDS = {
  encoder: 'the encoder is the small end: sizes and speed are its',
  decoder: 'the decoder is the small end: sizes and speed are its',
  both: 'no end is named the small one: sizes are the larger of both',
} as const;

function nearestLines(nearest: readonly NearMiss[], columns: number): string[] {
  return nearest.flatMap(({ id, gives }) => {
    const parts = gives.map(({ key, limit, needed }) => {
      const [from, to] = [limit, needed].map((x) => (typeof x === 'number' ? figureText(x) : x));
      return `${limitWords(key)} from ${from} to ${to}`;
    });
    return paragraph(`${id}: would have to give ${parts.join('; ')}`, columns);
  });
}

function heading(text: string, columns: number): string {
  const line = `── ${text} `;
  return line + '─'.repeat(Math.max(0, columns - 1 - [...line].length));
}

function corpusLines(
  record: RunRecord,
  choice: RunChoice['corpora'][number],
  { columns }: ChooseScreenOptions,
): string[] {
  const { pick, nearest } = choice;
  if (pick === undefined) {
    return [
      heading(`${choice.corpus}: nothing meets the limits`, columns),
      ' The nearest cells, and what would have to give:',
      ...nearestLines(nearest, columns),
    ];
  }
  const currency = record.plan.cost?.currency ?? 'of the plan’s currency';
  // Every pair is in choice.json; a reader who has the pick wants those that it is part of.
  const own = choice.breakEvens.filter((b) => [b.cheaper, b.smaller].includes(pick.cell.id));
  const changes = sensitivityLines(choice.sensitivities, columns);
  const stepAsked = record.plan.cost?.bill_step_bytes !== undefined;
  if (stepAsked && !choice.sensitivities.some(({ key }) => key === 'cost.bill_step_bytes'))
    changes.push(' bill step bytes: not tried, since message lengths are not known for every step');
  const breakEvens = breakEvenLines(own, currency, columns);
  return [
    heading(
      `${choice.corpus}: ship ${cellPhrase(pick.cell)} (${GOAL_WORDS[choice.goal]})`,
      columns,
    ),
    ...reviewLines(record, choice, choice.sensitivities).flatMap((line) =>
      paragraph(line, columns),
    ),
    ...section('Room under each limit', pick.verdicts.length === 0 ? [] : roomTable(pick)),
    ...section('Cells that no other beats in everything', frontTable(choice, columns)),
    ...section('Beaten', dominatedLines(choice, columns)),
    ...section('Pick as one limit or cost changes', changes),
    ...section('When more memory pays', breakEvens),
  ];
}

function section(title: string, lines: readonly string[]): string[] {
  return lines.length === 0 ? [] : ['', ` ${title}`, ...lines];
}

function exportCommand(run: string, choices: readonly CorpusChoice[]): string | undefined {
  const cell = choices.map(({ pick }) => pick?.cell).find((c) => c?.exports?.includes('c'));
  return cell === undefined
    ? undefined
    : `bitassay export ${run} --cell ${cell.id} --to c --prove -o tables`;
}

/** What a choice can bring about that no figure shows. */
function cautionOf(choices: readonly CorpusChoice[]): string {
  const shares = choices.some(
    ({ pick }) => pick !== undefined && (pick.cell.tables === 'primed' || !pick.cell.decodes_alone),
  );
  const shared = shares
    ? ' A pick here shares state between messages: across security domains that tells one side about the other.'
    : '';
  return `If messages are encrypted after coding, their lengths still tell of their content.${shared} A decoder is an attack surface: bound its output, and give messages a check of their own.`;
}

/** The screen of `bitassay choose`. */
export function chooseScreen(
  record: RunRecord,
  choice: RunChoice,
  options: ChooseScreenOptions,
): string {
  const { columns, run } = options;
  const lines = choice.corpora.flatMap((one) => [...corpusLines(record, one, options), '']);
  if (choice.across !== undefined) {
    lines.push(heading('all corpora', columns), ...acrossLines(choice.across, columns), '');
  }
  lines.push(
    ...paragraph(
      `Read so: ${END_WORDS[choice.terms.end]}. Flash, RAM and code are those of an export built on x86-64 where there is one, else estimates: choose ${run} --measured device.csv takes your own. A limit that a cell has no figure for counts as not met. "open": the interval reaches over the limit.`,
      columns,
    ),
    ...paragraph(
      'One corpus is a sample of what the product will send. The choice certifies nothing: your own standards and their reviewers decide.',
      columns,
    ),
  );
  lines.push(...paragraph(cautionOf(choice.corpora), columns));
  const next = exportCommand(run, choice.corpora);
  if (next !== undefined) lines.push(` Next: ${next}`);
  return `${lines.join('\n')}\n`;
}
