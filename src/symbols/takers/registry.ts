import { InputError, NotYetError } from '../../errors/errors.ts';
import { nearestWord } from '../../errors/nearest.ts';
import { bitsFamily, nibblesFamily } from './byte-parts.ts';
import { bytesFamily } from './bytes.ts';
import { codePointsFamily } from './code-points.ts';
import { csvColumnFamily } from './csv-column.ts';
import { recordFieldFamily } from './record-field.ts';
import { sixteenBitFamilies } from './sixteen-bit.ts';
import type { SymbolTaker, SymbolTakerFamily } from './taker.ts';

/** Every way to take symbols, in the order in which screens list them. */
export const symbolTakerFamilies: readonly SymbolTakerFamily[] = [
  bytesFamily,
  bitsFamily,
  nibblesFamily,
  ...sixteenBitFamilies,
  codePointsFamily,
  csvColumnFamily,
  recordFieldFamily,
];

/** Words that a later version will understand. */
const LATER_WORDS = ['words', 'json:', 'parquet:'];

/**
 * The taker behind a text such as `bytes` or `csv:temperature`.
 * @throws InputError for an unknown word, with the nearest, or a missing or needless argument; NotYetError for words that a
 *   later version will understand
 */
export function parseSymbolTaker(text: string): SymbolTaker {
  const trimmed = text.trim();
  const colon = trimmed.indexOf(':');
  const word = colon < 0 ? trimmed : trimmed.slice(0, colon + 1);
  const argument = colon < 0 ? '' : trimmed.slice(colon + 1).trim();
  const family = symbolTakerFamilies.find((f) => f.word === word);
  if (family !== undefined && (colon < 0 || argument !== '')) return family.create(argument);
  if (LATER_WORDS.includes(word)) {
    throw new NotYetError(`symbols taken as ${word.replace(':', '')} are not yet built`, {
      expected: expectedWords(),
      got: trimmed,
    });
  }
  const words = [...symbolTakerFamilies.map((f) => f.word), ...LATER_WORDS];
  const near = nearestWord(
    word.replace(':', ''),
    words.map((w) => w.replace(':', '')),
  );
  throw new InputError(`symbols cannot be taken as ${JSON.stringify(trimmed)}`, {
    expected: expectedWords(),
    got: trimmed,
    ...(near === undefined ? {} : { advice: `Did you mean ${near}${needsArgument(near)}?` }),
  });
}

function needsArgument(word: string): string {
  if (word === 'csv') return ':COLUMN';
  return word === 'field' ? ':NAME' : '';
}

function expectedWords(): string {
  return symbolTakerFamilies
    .map((f) => f.word.replace(':', ''))
    .map((w) => w + needsArgument(w))
    .join(', ');
}
