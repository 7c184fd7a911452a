import type { OperationCounts } from '../models/counting-tally.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Coder, Setup } from './contract.ts';
import {
  atBothEnds,
  type BothEnds,
  type EndCost,
  type EndOperations,
  extraCost,
  sumOf,
} from './cost.ts';
import { symbolWidth } from './fixed.ts';
import { innerSetup, isCoded } from './stored-encoder.ts';
import { messagesWhere, startOfMessage } from './table-set-messages.ts';

/** What the coder makes of each message before the shorter form is taken. */
interface Attempts {
  readonly isRaw: Uint8Array;
  /** Of the longest. */
  readonly longestBytes: number;
}

function attemptsOf(coder: Coder, sequence: SymbolSequence, setup: Setup): Attempts {
  const encoder = coder.encoder(innerSetup(setup));
  encoder.push(sequence);
  const { messageEndsBits } = encoder.finish();
  const width = symbolWidth(setup.alphabetSize);
  const isRaw = new Uint8Array(messageEndsBits.length);
  let longestBytes = 0;
  for (let i = 0; i < isRaw.length; i++) {
    const bits = messageEndsBits[i] - (i === 0 ? 0 : messageEndsBits[i - 1]);
    const symbolCount = sequence.messageEnds[i] - startOfMessage(sequence, i);
    if (!isCoded(setup, width, symbolCount, bits)) isRaw[i] = 1;
    longestBytes = Math.max(longestBytes, Math.ceil(bits / 8));
  }
  return { isRaw, longestBytes };
}

/**
 * The coder's own costs, and at the encoder a buffer for the longest message as the coder makes it, which only then is held
 * against raw symbols. Selector, comparison and raw symbols are 12 statements, at the decoder 10.
 */
export function storedCosts(
  coder: Coder,
  setup: Setup,
  sequence: SymbolSequence,
): BothEnds<EndCost> | undefined {
  // A coder that holds its coded message itself holds it in that buffer.
  const own = coder.costs?.(innerSetup(setup), 0, sequence);
  if (own === undefined) return undefined;
  const { longestBytes } = attemptsOf(coder, sequence, setup);
  return atBothEnds(
    own,
    { encoder: extraCost(0, longestBytes, 12), decoder: extraCost(0, 0, 10) },
    sumOf,
  );
}

/**
 * The encoder codes every message and tests which form is shorter, the decoder reads the coded ones, and of raw ones tests
 * each symbol; either tests the selector. The test of a message is booked on one of its symbols, so the worst is a bound.
 */
export function storedOperations(
  coder: Coder,
  sequence: SymbolSequence,
  setup: Setup,
): EndOperations | undefined {
  const inner = innerSetup(setup);
  const all = coder.operations?.(sequence, inner);
  if (all === undefined) return undefined;
  const { isRaw } = attemptsOf(coder, sequence, setup);
  const kept = isRaw.includes(1)
    ? coder.operations!(
        messagesWhere(sequence, (i) => isRaw[i] === 0),
        inner,
      )
    : all;
  if (kept === undefined) return undefined;
  const symbolCount = sequence.symbols.length;
  const rawCount = symbolCount - kept.decoder.symbolCount;
  const rawTests = rawCount > 0 ? 2 : 0;
  return {
    encoder: withTests(all.encoder, symbolCount, isRaw.length, 0),
    decoder: withTests(kept.decoder, symbolCount, isRaw.length + rawCount, rawTests),
  };
}

/** `counts`, as of `symbolCount` symbols, with `tests` branches more: one on a coded symbol, at most `rawTests` on a raw one. */
function withTests(
  counts: OperationCounts,
  symbolCount: number,
  tests: number,
  rawTests: number,
): OperationCounts {
  const { total, worst } = counts;
  const coded = counts.symbolCount === 0 ? 0 : worst.branches + 1;
  return {
    ...counts,
    symbolCount,
    total: { ...total, branches: total.branches + tests },
    worst: { ...worst, branches: Math.max(coded, rawTests) },
  };
}
