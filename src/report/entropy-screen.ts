import type { CorpusRecord, EntropyRecord } from '../harness/run-record.ts';
import {
  countText,
  padLeft,
  padRight,
  rateText,
  sizeText,
  symbolNoun,
  wrapText,
} from './figures.ts';

export interface EntropyScreenOptions {
  readonly columns: number;
  readonly next: string;
  /** No coder was run for a ceiling. */
  readonly withoutCeilings: boolean;
  /** For each entry the sentence that reconciles estimable and useful. */
  sentenceOf(entropy: EntropyRecord): string;
}

const CONTEXT_WORDS = {
  message: 'contexts within each message',
  running: 'contexts running on over message ends',
} as const;

function orderRows(entropy: EntropyRecord): string[] {
  const head = [
    'order',
    'corrected',
    '95 % interval',
    'plug-in',
    'contexts',
    'pairs',
    'estimable',
    'useful',
  ];
  const rows = entropy.orders.map((order) => [
    String(order.k),
    // Beyond estimable the figure says more about the length of the file than about the source.
    order.estimable ? rateText(order.corrected) : `(${rateText(order.corrected)})`,
    order.estimable && order.low !== undefined
      ? `${rateText(order.low)} to ${rateText(order.high!)}`
      : '–',
    rateText(order.plug_in),
    countText(order.contexts),
    countText(order.pairs),
    order.estimable ? 'yes' : 'no',
    order.useful === undefined ? '–' : order.useful ? 'yes' : 'no',
  ]);
  const widths = head.map((h, i) => Math.max(h.length, ...rows.map((row) => [...row[i]].length)));
  const write = (cells: string[]): string =>
    ` ${cells.map((text, i) => (i < 6 ? padLeft(text, widths[i]) : padRight(text, widths[i]))).join('  ')}`.trimEnd();
  return [write(head), ...rows.map(write)];
}

/** The screen of `bitassay entropy` for one corpus: entropy by order, the floor, what to trust. */
export function entropyScreen(
  corpus: CorpusRecord,
  entries: readonly EntropyRecord[],
  options: EntropyScreenOptions,
): string {
  const noun = symbolNoun(corpus.symbols_as);
  const lines: string[] = [
    ` ${corpus.name}: ${countText(corpus.symbol_count)} symbols (${corpus.symbols_as}), ${countText(corpus.message_count)} ${corpus.message_count === 1 ? 'message' : 'messages'} (${corpus.messages_as}), alphabet of ${countText(corpus.alphabet_size)}`,
    '',
  ];
  for (const entropy of entries) {
    const { floor } = entropy;
    lines.push(
      ` Entropy by order, bits/${noun}, ${CONTEXT_WORDS[entropy.contexts]}`,
      '',
      ...orderRows(entropy),
      '',
    );
    const size = sizeText((floor.point * corpus.symbol_count) / 8);
    lines.push(
      ...wrapText(
        `Floor, an estimate: ≈ ${rateText(floor.point)} bits/${noun} (${size}), band ${rateText(floor.low)} to ${rateText(floor.high)}: ${floor.method}.`,
        options.columns - 1,
        ' ',
      ),
      ...wrapText(options.sentenceOf(entropy), options.columns - 1, ' '),
    );
    if (floor.cut) {
      lines.push(
        ...wrapText(
          `A verified coder needs less than the corrected entropy of order ${floor.order}: that order is not enough for this source.`,
          options.columns - 1,
          ' ',
        ),
      );
    }
    lines.push('');
  }
  lines.push(
    ...wrapText(
      `${
        options.withoutCeilings
          ? 'No coder was run, so the upper end of the band is only the fixed width or the entropy itself.'
          : 'The upper end of the band is a bound, reached by a decoder that was run; the point and the lower end are estimates.'
      } The interval is a simple one, from blocks of the data. Figures in parentheses are not estimable from this much data.`,
      options.columns - 1,
      ' ',
    ),
    ` Next: ${options.next}`,
    '',
  );
  return lines.join('\n');
}
