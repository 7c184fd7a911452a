import { InputError } from '../errors/errors.ts';
import { type SymbolSequence, sliceMessages } from '../symbols/sequence.ts';
import { floorShare, type SplitRule } from './decide-split.ts';

/**
 * The last share of a train part: what lies nearest to the test part in time, as in a product whose tables were trained
 * lately on little data. So many messages, rounded down; by `block` so many symbols, whose first message may lack its
 * beginning. Symbols are shared.
 * @param share   above 0, up to 1
 * @param filled  messages are units, which are never cut
 * @param corpus  as errors name it
 * @throws InputError when nothing would be left to train on
 */
export function lastShare(
  train: SymbolSequence,
  share: number,
  by: SplitRule['by'],
  filled: boolean,
  corpus: { readonly name: string; readonly messagesAs: string },
): SymbolSequence {
  const { symbols, messageEnds, alphabetSize } = train;
  const bySymbols = by === 'block' && !filled;
  const count = bySymbols ? symbols.length : messageEnds.length;
  const taken = floorShare(share, count);
  let part: SymbolSequence;
  if (bySymbols) {
    const from = symbols.length - taken;
    part = {
      alphabetSize,
      symbols: symbols.subarray(from),
      messageEnds: messageEnds.filter((end) => end > from).map((end) => end - from),
    };
  } else part = sliceMessages(train, count - taken, count);
  if (part.symbols.length > 0) return part;
  const thing = bySymbols ? 'symbol' : filled ? 'unit' : 'message';
  throw new InputError(`a share of ${share} leaves the corpus ${corpus.name} nothing to train on`, {
    key: 'vary.train_share',
    expected: `a share of at least one ${thing} that holds symbols`,
    got: `${share} of ${count} ${thing}${count === 1 ? '' : 's'}, messages: ${corpus.messagesAs}`,
    advice: bySymbols
      ? 'Use a larger share, or name more data.'
      : 'Use a larger share, name more data, or split by: block.',
  });
}
