import type { CellGate, Gate } from '../gate/gate.ts';
import { padLeft, padRight } from './figures.ts';
import {
  allowText,
  answerText,
  figureWords,
  fileName,
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
  worstFilesText,
} from './gate-words.ts';
import { paragraph } from './paragraph.ts';

export interface GateScreenOptions {
  readonly columns: number;
  /** What was gated, and against what, for the commands that are proposed. */
  readonly run: string;
  readonly baseline: string;
}

/** Cells of which all is said. */
const MOST_CELLS = 12;
const MOST_LINES = 10;

function indented(text: string, columns: number, blanks = 2): string[] {
  const margin = ' '.repeat(blanks);
  return paragraph(printable(text), columns - blanks).map((line) => margin + line);
}

/** One row a cell: its growth in bits and share, spelled. */
function growthTable(cells: readonly CellGate[], columns: number): string[] {
  const shown = cells.filter(({ was, now }) => was !== undefined && now !== was);
  if (shown.length === 0) return [];
  const rows = shown.map((cell) => ({
    cell,
    id: printable(cell.id),
    bits: signedCount(cell.now! - cell.was!).replaceAll('\u00a0', ' '),
    share: shareText(cell.was!, cell.now!).replaceAll('\u00a0', ' '),
  }));
  const widths = [
    Math.min(Math.max(...rows.map(({ id }) => [...id].length), 4), Math.floor(columns * 0.46)),
    Math.max(...rows.map(({ bits }) => bits.length), 4),
    Math.max(...rows.map(({ share }) => share.length), 5),
  ];
  const room = columns - 1 - widths.reduce((sum, width) => sum + width + 2, 1);
  const piece = growthPiece(shown, room);
  const key = legend(shown);
  return [
    ...(key === ''
      ? []
      : paragraph(`one letter = ${piece} ${piece === 1 ? 'bit' : 'bits'} more: ${key}`, columns)),
    ` ${padRight('cell', widths[0])}  ${padLeft('bits', widths[1])}  ${padLeft('share', widths[2])}`,
    ...rows.map(({ cell, id, bits, share }) => {
      const name = [...id].length <= widths[0] ? id : `…${[...id].slice(1 - widths[0]).join('')}`;
      const letters = spelledGrowth(cell, piece, room);
      return ` ${padRight(name, widths[0])}  ${padLeft(bits, widths[1])}  ${padLeft(share, widths[2])}  ${letters}`.trimEnd();
    }),
  ];
}

function lostLines(cell: CellGate, columns: number): string[] {
  const lost = cell.checks.filter(
    ({ verdict, figure }) => verdict === 'lost' && figure !== 'files',
  );
  const grown = cell.lines.filter(({ was, now }) => now > was).slice(0, 3);
  const fell = cell.lines.filter(({ was, now }) => now < was).length;
  const files = worstFilesText(cell);
  const floor = floorText(cell);
  const bitsLost = cell.checks.some(
    ({ verdict, figure }) => verdict === 'lost' && ['carried_bits', 'files'].includes(figure),
  );
  return [
    ...paragraph(printable(cell.id), columns),
    ...lost.flatMap((check) =>
      indented(`${figureWords(check.figure)}: ${valuesText(check)}`, columns),
    ),
    ...(bitsLost ? grown.flatMap((line) => indented(lineText(line), columns, 4)) : []),
    ...(bitsLost && grown.length > 0 && fell > 0
      ? indented(`${fell} other ${fell === 1 ? 'line' : 'lines'} of the account fell`, columns, 4)
      : []),
    ...(bitsLost && floor !== undefined ? indented(floor, columns, 4) : []),
    ...(bitsLost && files !== undefined ? indented(files, columns) : []),
  ];
}

function listed(title: string, texts: readonly string[], columns: number): string[] {
  if (texts.length === 0) return [];
  const more = texts.length - MOST_LINES;
  return [
    '',
    ` ${title}`,
    ...texts.slice(0, MOST_LINES).flatMap((text) => indented(text, columns)),
    ...(more > 0 ? [`   and ${more} more (--json lists them all)`] : []),
  ];
}

/** Cells of which a size, a count or the verification is better, with what it is. */
function betterTexts(cells: readonly CellGate[]): string[] {
  return cells
    .filter(({ verdict }) => verdict === 'better')
    .flatMap(({ id, checks }) =>
      checks
        .filter((c) => c.verdict === 'better' && !c.figure.endsWith('.speed'))
        .map((check) => `${id}: ${figureWords(check.figure)} ${valuesText(check)}`),
    );
}

/** The screen of `bitassay gate`. */
export function gateScreen(gate: Gate, { columns, run, baseline }: GateScreenOptions): string {
  const lost = gate.cells.filter(({ verdict }) => verdict === 'lost');
  const changed = gate.cells.filter(({ reference }) => !reference);
  const grown = changed.filter(({ was, now }) => was !== undefined && now! > was);
  const speeds = speedsText(gate);
  const versions =
    gate.tool.was === gate.tool.now ? '' : `; bitassay ${gate.tool.now}, was ${gate.tool.was}`;
  const lines = [
    ...paragraph(answerText(gate), columns),
    ...paragraph(`${printable(gate.title)}; ${allowText(gate)}${versions}`, columns),
  ];
  if (grown.length > 0)
    lines.push('', ...growthTable(mostUrgentFirst(grown).slice(0, MOST_CELLS), columns));
  if (lost.length > 0) {
    lines.push('', ' What held and does not any more');
    for (const cell of mostUrgentFirst(lost).slice(0, MOST_CELLS))
      lines.push(...lostLines(cell, columns));
    if (lost.length > MOST_CELLS)
      lines.push(` and ${lost.length - MOST_CELLS} more (--to md lists them all)`);
  }
  lines.push(...listed('Slower, but on an uneven machine', unevenTexts(gate), columns));
  lines.push(...listed('Better', betterTexts(gate.cells), columns));
  const unpaired = gate.unpaired.map(({ id, reason }) => `${id}: ${reason}`);
  lines.push(...listed('Not paired', unpaired, columns));
  const files = unpairedFilesOf(gate).map(
    ({ file, found }) => `file ${fileName(file)}: only in the ${found}`,
  );
  lines.push(...listed('Files not paired', files, columns));
  lines.push(...listed('Not compared', notComparedTexts(gate), columns));
  lines.push('');
  if (speeds !== undefined) {
    lines.push(
      ...paragraph(
        `${speeds}. A speed fails the gate only where its 99 % interval lies beyond 3 %.`,
        columns,
      ),
    );
  }
  lines.push(
    ...paragraph(
      lost.length > 0
        ? `Next: mend it, or keep the change with its reason: bitassay adopt ${run} -o ${baseline} --reason "…"`
        : gate.verdict === 'better'
          ? `Next: bitassay adopt ${run} -o ${baseline}`
          : 'Next: nothing. Figures of these data do not certify what other data will take.',
      columns,
    ),
  );
  return `${lines.join('\n')}\n`;
}
