import type { CellRecord } from '../harness/run-record.ts';
import { type FieldChoice, parseFieldChoice } from '../symbols/field-choice.ts';
import { padLeft, padRight, wrapText } from './figures.ts';
import { cellPhrase } from './floor-lines.ts';
import { CUT, pieceFor } from './spelled-gap.ts';

/** One letter a transform; the bar of a field is made of it. */
const TRANSFORM_LETTERS: readonly (readonly [transform: string, letter: string, words: string])[] =
  [
    ['raw', 'r', 'raw'],
    ['delta', 'd', 'delta'],
    ['delta2', '2', 'delta2'],
    ['xor', 'x', 'xor'],
    ['linear', 'l', 'linear'],
  ];

const MOST_NAME = 20;
const LEAST_ROOM = 12;

function contextWords({ context }: FieldChoice): string {
  switch (context.kind) {
    case 'none':
      return '';
    case 'last':
      return 'own last difference';
    case 'value':
      return 'own last value';
    case 'field':
      return `difference of ${context.name}`;
    case 'at':
      return `value of ${context.name}`;
    case 'was':
      return `last value of ${context.name}`;
  }
}

const cut = (text: string, most: number) =>
  [...text].length <= most ? text : `${[...text].slice(0, most - 1).join('')}${CUT}`;

/**
 * Which field of the record costs what: for a cell that was coded by fields, a line a field in the
 * order of the record, with its bits a record, what was picked for it, and a bar whose letter names
 * the transform. Nothing for other cells.
 * @param recordBytes  of the corpus, to count its records
 */
export function fieldLines(cell: CellRecord, recordBytes: number, columns: number): string[] {
  const { fields } = cell;
  const records = (cell.symbol_count ?? 0) / recordBytes;
  if (fields === undefined || records === 0) return [];
  const rows = fields.map(({ name, bits, choice }) => {
    const parsed = parseFieldChoice(name, choice);
    const { transform } = parsed;
    return {
      rate: bits / records,
      letter: TRANSFORM_LETTERS.find(([word]) => word === transform)?.[1] ?? '?',
      texts: [
        cut(name, MOST_NAME),
        (bits / records).toFixed(2),
        transform,
        cut(contextWords(parsed), MOST_NAME + 14),
      ],
    };
  });
  const heads = ['field', 'bits/record', 'transform', 'context'];
  const widths = heads.map((head, i) =>
    Math.max(head.length, ...rows.map(({ texts }) => [...texts[i]].length)),
  );
  const used = widths.reduce((sum, width) => sum + width + 2, 2);
  if (columns - used < LEAST_ROOM)
    widths[3] = Math.max(heads[3].length, widths[3] - LEAST_ROOM + columns - used);
  const room = columns - widths.reduce((sum, width) => sum + width + 2, 2);
  const widest = Math.max(...rows.map(({ rate }) => rate));
  const piece = pieceFor([widest], room);
  const write = (texts: readonly string[]) =>
    texts
      .map((text, i) =>
        i === 1 ? padLeft(text, widths[i]) : padRight(cut(text, widths[i]), widths[i]),
      )
      .join('  ');
  const total = rows.reduce((sum, { rate }) => sum + rate, 0);
  const legend = TRANSFORM_LETTERS.filter(([, letter]) => rows.some((r) => r.letter === letter))
    .map(([, letter, words]) => `${letter} ${words}`)
    .join(', ');
  return [
    ...wrapText(
      `Fields of ${cellPhrase(cell)}: ${total.toFixed(2)} bits a record, framing and ends not counted. One letter = ${piece} bit/record and names the transform: ${legend}.`,
      columns - 1,
      ' ',
    ),
    '',
    `  ${write(heads)}`.trimEnd(),
    ...rows.map(({ texts, rate, letter }) =>
      `  ${write(texts)}  ${bar(letter, Math.round(rate / piece), room)}`.trimEnd(),
    ),
  ];
}

function bar(letter: string, length: number, room: number): string {
  return length <= room ? letter.repeat(length) : letter.repeat(room - 1) + CUT;
}
