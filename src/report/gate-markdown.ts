import type { CellGate, Gate } from '../gate/gate.ts';
import {
  allowText,
  answerText,
  figureWords,
  fileName,
  fileText,
  floorText,
  growthPiece,
  legend,
  lineText,
  mostUrgentFirst,
  notComparedTexts,
  printable,
  shareText,
  signedCount,
  speedsText,
  spelledGrowth,
  unevenTexts,
  unpairedFilesOf,
  valuesText,
  WORST_FILES,
} from './gate-words.ts';

/** Text in which Markdown and HTML see nothing of their own; a mention or a reference is broken by an empty comment. */
export function markdownText(text: string): string {
  return printable(text)
    .replace(/[&<>]/g, (c) => ({ '&': '&amp;', '<': '&lt;', '>': '&gt;' })[c]!)
    .replace(/[\\`*_[\]|~$]/g, '\\$&')
    .replace(/[@#](?=\w)/g, '$&<!-- -->');
}

/**
 * Text as code: fenced by more backticks than it has in a row. A bar is escaped, since a row of a table ends there even in code;
 * a backslash before it is the only one that a table takes away.
 */
export function markdownCode(text: string): string {
  const safe = printable(text).replace(/\|/g, '\\|');
  const longest = Math.max(0, ...[...safe.matchAll(/`+/g)].map(([run]) => run.length));
  const fence = '`'.repeat(longest + 1);
  const pad = /^[` ]|[` ]$/.test(safe) || safe === '' ? ' ' : '';
  return `${fence}${pad}${safe}${pad}${fence}`;
}

const plain = (text: string): string => text.replaceAll('\u00a0', ' ');

function table(titles: readonly string[], rows: readonly (readonly string[])[]): string[] {
  if (rows.length === 0) return [];
  const row = (cells: readonly string[]) => `| ${cells.join(' | ')} |`;
  return [row(titles), row(titles.map(() => '---')), ...rows.map(row), ''];
}

function details(title: string, items: readonly string[]): string[] {
  if (items.length === 0) return [];
  return [
    `<details><summary>${title}: ${items.length}</summary>`,
    '',
    ...items.map((item) => `- ${item}`),
    '',
    '</details>',
    '',
  ];
}

const LETTERS = 40;

function growthRows(cells: readonly CellGate[], piece: number): string[][] {
  return cells
    .filter(({ was, now }) => was !== undefined && now !== was)
    .map((cell) => [
      markdownCode(cell.id),
      plain(signedCount(cell.now! - cell.was!)),
      plain(shareText(cell.was!, cell.now!)),
      cell.lines.length === 0 ? '' : markdownCode(spelledGrowth(cell, piece, LETTERS).trim()),
    ]);
}

function lostItems(cell: CellGate): string[] {
  const lost = cell.checks.filter(
    ({ verdict, figure }) => verdict === 'lost' && figure !== 'files',
  );
  const grown = cell.lines.filter(({ was, now }) => now > was);
  const files = cell.files.filter(({ was, now }) => now > was).slice(0, WORST_FILES);
  const beyond = cell.files.filter((file) => file.lost).length;
  const items = [
    ...lost.map((check) => `${figureWords(check.figure)}: ${valuesText(check)}`),
    ...grown.map(lineText),
    ...(grown.length === 0 ? [] : [floorText(cell) ?? []].flat()),
    ...(files.length === 0
      ? []
      : [
          `files that grew most: ${files.map(fileText).join(', ')}; ${beyond} beyond what is allowed`,
        ]),
  ];
  return [markdownCode(cell.id), '', ...items.map((item) => `- ${markdownText(plain(item))}`), ''];
}

/** The gate as Markdown for a pull request. */
export function gateMarkdown(gate: Gate): string {
  const own = gate.cells.filter(({ reference }) => !reference);
  const lost = gate.cells.filter(({ verdict }) => verdict === 'lost');
  const changed = own.filter(({ was, now }) => was !== undefined && now !== was);
  const piece = growthPiece(changed, LETTERS);
  const key = legend(changed);
  const speeds = speedsText(gate);
  return `${[
    `### bitassay gate: ${markdownText(plain(answerText(gate)))}`,
    '',
    `Plan ${markdownCode(gate.title)}; ${allowText(gate)}.${speeds === undefined ? '' : ` ${speeds}.`}`,
    '',
    ...table(
      ['cell', 'bits', 'share', 'lines that changed'],
      growthRows(mostUrgentFirst(changed), piece),
    ),
    ...(key === ''
      ? []
      : [
          `One letter is ${piece} bit${piece === 1 ? '' : 's'}: ${key}; fallen lines in parentheses.`,
          '',
        ]),
    ...(lost.length === 0 ? [] : ['#### What held and does not any more', '']),
    ...mostUrgentFirst(lost).flatMap(lostItems),
    ...details(
      'Slower, on an uneven machine: time them again',
      unevenTexts(gate).map((text) => markdownText(plain(text))),
    ),
    ...details(
      'Not paired',
      gate.unpaired.map(({ id, reason }) => `${markdownCode(id)}: ${markdownText(reason)}`),
    ),
    ...details(
      'Files not paired',
      unpairedFilesOf(gate).map(
        ({ file, found }) => `${markdownCode(fileName(file))}: only in the ${found}`,
      ),
    ),
    ...details(
      'Not compared',
      notComparedTexts(gate).map((text) => markdownText(plain(text))),
    ),
  ].join('\n')}`;
}
