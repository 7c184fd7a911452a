import { oneMessage, type SymbolSequence, sliceMessages } from '../symbols/sequence.ts';
import type { CorpusData } from './corpus-data.ts';

/**
 * The corpus with only the first messages of its test part: as many whole ones as have at most `mostSymbols` symbols. Where the
 * first alone has more, its beginning as one message, cut between records or units.
 */
export function leadingPart(corpus: CorpusData, mostSymbols: number): CorpusData {
  if (corpus.test.symbols.length <= mostSymbols) return corpus;
  const step = corpus.record?.bytes ?? corpus.fill?.unitSymbols ?? 1;
  const test = leadingMessages(corpus.test, mostSymbols, step);
  const messageCount = test.messageEnds.length;
  let before = 0;
  const testFiles = corpus.testFiles.flatMap((file) => {
    if (before >= messageCount) return [];
    before = file.messageEnd;
    return [{ ...file, messageEnd: Math.min(file.messageEnd, messageCount) }];
  });
  return { ...corpus, test, testFiles };
}

function leadingMessages(
  sequence: SymbolSequence,
  mostSymbols: number,
  step: number,
): SymbolSequence {
  const { symbols, messageEnds, alphabetSize } = sequence;
  let messages = 0;
  while (messageEnds[messages] <= mostSymbols) messages++;
  const whole = messages === 0 ? 0 : messageEnds[messages - 1];
  if (whole > 0) return sliceMessages(sequence, 0, messages);
  const end = Math.min(messageEnds[messages], Math.max(1, Math.floor(mostSymbols / step)) * step);
  return oneMessage(symbols.subarray(0, end), alphabetSize);
}
