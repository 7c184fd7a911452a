import type { CorpusRecord, EntropyRecord } from '../harness/run-record.ts';
import { asciiText } from './ascii.ts';
import { driftLines } from './drift-lines.ts';
import {
  ceilingNotes,
  contradictionNotes,
  dataNotes,
  furtherNotes,
  validityNotes,
} from './entropy-notes.ts';
import { countText, rateText, sizeText, symbolNoun } from './figures.ts';
import { countInText, paragraph } from './paragraph.ts';
import { plotLegend, ratePlot } from './rate-plot.ts';
import { readingLines } from './reading-lines.ts';
import { textTable } from './text-table.ts';

export interface EntropyScreenOptions {
  readonly columns: number;
  readonly next: string;
  /** Also what is not the usual estimate. */
  readonly all: boolean;
  /** No characters beyond ASCII. */
  readonly ascii: boolean;
  /** Greys a line on a terminal with colours; where absent, figures not to be relied on stand in parentheses. */
  readonly dim?: (text: string) => string;
  /** For each entry the sentence that reconciles estimable and useful. */
  sentenceOf(entropy: EntropyRecord): string;
}

const CONTEXT_WORDS = {
  message: 'contexts within each message',
  running: 'contexts running on over message ends',
} as const;

const NO_FIGURE = '–';

type Order = EntropyRecord['orders'][number];

/** Greys the rows of orders that are not estimable, below the title. */
function greyed(
  lines: string[],
  orders: readonly Order[],
  options: EntropyScreenOptions,
): string[] {
  const { dim } = options;
  if (dim === undefined) return lines;
  return lines.map((line, i) => (i > 0 && !orders[i - 1].estimable ? dim(line) : line));
}

function figureOf(order: Order, bits: number, options: EntropyScreenOptions): string {
  const text = rateText(bits);
  return order.estimable || options.dim !== undefined ? text : `(${text})`;
}

function orderTable({ orders }: EntropyRecord, options: EntropyScreenOptions): string[] {
  const lines = textTable(
    [
      { title: 'order', right: true },
      { title: 'corrected', right: true },
      { title: '95 % interval', right: true },
      { title: 'from', right: false },
      { title: 'estimable', right: false },
      { title: 'useful', right: false },
    ],
    orders.map((order) => {
      const stated = order.estimable && order.low !== undefined;
      return [
        String(order.k),
        figureOf(order, order.corrected, options),
        stated
          ? `${rateText(order.low!)} to ${rateText(order.high!)}${order.interval_trusted === false ? ' ?' : ''}`
          : NO_FIGURE,
        stated ? (order.interval_unit ?? '') : '',
        order.estimable ? 'yes' : 'no',
        order.useful === undefined ? NO_FIGURE : order.useful ? 'yes' : 'no',
      ];
    }),
  );
  return greyed(lines, orders, options);
}

function otherEstimates({ orders }: EntropyRecord, options: EntropyScreenOptions): string[] {
  const figure = (order: Order, bits: number | undefined): string =>
    bits === undefined ? NO_FIGURE : figureOf(order, bits, options);
  const lines = textTable(
    ['order', 'plug-in', 'Grassberger', 'Chao–Shen', 'NSB', 'contexts', 'pairs'].map((title) => ({
      title,
      right: true,
    })),
    orders.map((order) => [
      String(order.k),
      figure(order, order.plug_in),
      figure(order, order.estimates?.grassberger),
      figure(order, order.estimates?.chao_shen),
      figure(order, order.estimates?.nsb),
      countText(order.contexts),
      countText(order.pairs),
    ]),
  );
  return [
    ' Other estimates of the same counts; none is a bound, plug-in is too low',
    '',
    ...greyed(lines, orders, options),
    '',
  ];
}

function blockTable(view: NonNullable<EntropyRecord['block_view']>, noun: string): string[] {
  return [
    ` Blocks of n, bits/${noun}: H is their entropy, L a prefix code of the same blocks`,
    '',
    ...textTable(
      [
        'n',
        'blocks',
        'distinct',
        'H plug-in',
        'L, table apart',
        'H + 1/n',
        'H corrected',
        'NSB',
      ].map((title) => ({ title, right: true })),
      view.map((block) => {
        const bracket = (bits: number): string =>
          block.estimable ? rateText(bits) : `(${rateText(bits)})`;
        return [
          String(block.n),
          countText(block.blocks),
          countText(block.distinct),
          rateText(block.plug_in),
          rateText(block.huffman),
          rateText(block.plug_in + 1 / block.n),
          bracket(block.corrected),
          block.nsb === undefined ? NO_FIGURE : bracket(block.nsb),
        ];
      }),
    ),
    '',
  ];
}

function plotLines(entropy: EntropyRecord, options: EntropyScreenOptions): string[] {
  const { orders, floor, ceilings } = entropy;
  const name = ceilings?.find((c) => c.rate === floor.high)?.name;
  const rows = orders.map((order) => ({
    label: `order ${order.k}`,
    point: order.corrected,
    ...(order.low === undefined ? {} : { low: order.low, high: order.high! }),
    faint: !order.estimable,
  }));
  const plot = ratePlot(
    [
      ...rows,
      { label: 'floor', point: floor.point, low: floor.low, high: floor.high, faint: false },
    ],
    {
      width: Math.min(options.columns, 100) - 1,
      ascii: options.ascii,
      ...(name === undefined ? {} : { ceiling: { name, rate: floor.high } }),
    },
  );
  return [...plot, ...paragraph(plotLegend(options.ascii), options.columns)];
}

/** What is counted within one kind of contexts: table, plot, floor, and what both rest on. */
function scopeSection(
  corpus: CorpusRecord,
  entropy: EntropyRecord,
  options: EntropyScreenOptions,
  isFirst: boolean,
): string[] {
  const noun = symbolNoun(corpus.symbols_as);
  const { floor } = entropy;
  const size = sizeText((floor.point * corpus.symbol_count) / 8);
  const notes = [
    ...validityNotes(entropy),
    `Floor, an estimate: ≈ ${rateText(floor.point)} bits/${noun} (${size}), band ${rateText(floor.low)} to ${rateText(floor.high)}: ${floor.method}.`,
    ...contradictionNotes(entropy),
    options.sentenceOf(entropy),
    ...(isFirst ? ceilingNotes(entropy, noun) : []),
    ...(options.all ? furtherNotes(entropy, noun) : []),
  ];
  return [
    ` Entropy by order, bits/${noun}, estimates, ${CONTEXT_WORDS[entropy.contexts]}`,
    '',
    ...orderTable(entropy, options),
    '',
    ...(options.all ? otherEstimates(entropy, options) : []),
    ...plotLines(entropy, options),
    '',
    ...notes.flatMap((note) => paragraph(note, options.columns)),
    '',
    ...(options.all && entropy.block_view !== undefined
      ? blockTable(entropy.block_view, noun)
      : []),
  ];
}

/** The screen of `bitassay entropy` for one corpus: entropy by order, the floor, change, how much data, what to trust. */
export function entropyScreen(
  corpus: CorpusRecord,
  entries: readonly EntropyRecord[],
  options: EntropyScreenOptions,
): string {
  const { columns, ascii } = options;
  const noun = symbolNoun(corpus.symbols_as);
  const thing = corpus.unit_count === undefined ? 'message' : 'unit';
  const messages = corpus.message_count === 1 ? thing : `${thing}s`;
  const alphabet =
    corpus.alphabet_size === undefined ? '' : `, alphabet of ${countInText(corpus.alphabet_size)}`;
  const lines: string[] = paragraph(
    `${corpus.name}: ${countInText(corpus.symbol_count)} symbols (${corpus.symbols_as}), ${countInText(corpus.message_count)} ${messages} (${corpus.messages_as})${alphabet}`,
    columns,
  );
  const sampled = entries[0]?.sampled_symbols;
  if (sampled !== undefined) {
    lines.push(
      ...paragraph(
        `Sampled: the figures rest on ${countInText(sampled)} symbols in 64 evenly spread pieces. No coder was run for a ceiling, since what it needs for a sample is no bound on the whole, and which orders are useful was not tested.`,
        columns,
      ),
    );
  }
  lines.push(...readingLines(corpus, undefined, columns), '');
  entries.forEach((entropy, i) => {
    lines.push(...scopeSection(corpus, entropy, options, i === 0));
  });
  for (const entropy of entries) {
    const drift = driftLines(corpus, entropy, { columns, ascii, noun });
    if (drift.length > 0) lines.push(...drift, '');
    const needed = dataNotes(entropy, noun);
    if (needed.length > 0) {
      lines.push(' How much data', '');
      lines.push(...needed.flatMap((note) => paragraph(note, columns)), '');
    }
  }
  lines.push(
    ...paragraph(
      `Bounds are the ceilings alone, each reached by a decoder that gave back these data${
        onlyFixed(entries) ? '; here that is the fixed width, since no coder was run' : ''
      }. All else is an estimate: from one finite sample no lower bound on the rate holds for every source.${
        options.dim === undefined
          ? ' Figures in parentheses are not estimable from this much data.'
          : ''
      }`,
      columns,
    ),
    ` Next: ${options.next}`,
    '',
  );
  const text = lines.join('\n');
  return ascii ? asciiText(text) : text;
}

function onlyFixed(entries: readonly EntropyRecord[]): boolean {
  return entries.every((entropy) => (entropy.ceilings ?? []).every((c) => c.name === 'fixed'));
}
