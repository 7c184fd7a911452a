import { CorruptStreamError } from '../errors/errors.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Candidate } from './candidate.ts';
import type { Coded, Decoded, Setup, Tables } from './contract.ts';

/** Symbols of each message of a whole sequence. */
export function symbolCountsOf(sequence: SymbolSequence): Uint32Array {
  const counts = new Uint32Array(sequence.messageEnds.length);
  let from = 0;
  for (let i = 0; i < counts.length; i++) {
    counts[i] = sequence.messageEnds[i] - from;
    from = sequence.messageEnds[i];
  }
  return counts;
}

/** What a decoder is entitled to: never the sent tables or a budget, and of the lengths only what the framing grants. */
export function decoderSetup(setup: Setup): Setup {
  const { tables, fill: _, ...rest } = setup;
  return tables !== undefined && setup.policy !== 'sent' ? { ...rest, tables } : rest;
}

/**
 * Decodes a unit with a new coder that sees only the carried bytes and what policy and framing entitle it to.
 * @throws what the decoder throws
 */
export function decodeUnit(
  candidate: Candidate,
  setup: Setup,
  coded: Coded,
  unit: SymbolSequence,
): Decoded {
  const decoder = candidate
    .create()
    .decoder(decoderSetup(setup), { maxSymbols: unit.symbols.length });
  return decoder.decode({
    bytes: coded.bytes,
    messageCount: unit.messageEnds.length,
    ...(setup.lengths === 'link' ? { messageEndsBits: coded.messageEndsBits } : {}),
    ...(setup.lengths === 'known' ? { symbolCounts: symbolCountsOf(unit) } : {}),
  });
}

/**
 * Compares a decoded unit with what was coded, symbol by symbol and end by end.
 * @throws CorruptStreamError at the first difference
 */
export function compareDecoded(decoded: Decoded, coded: Coded, unit: SymbolSequence): void {
  const { symbols, messageEnds } = decoded.sequence;
  if (symbols.length !== unit.symbols.length || messageEnds.length !== unit.messageEnds.length) {
    throw new CorruptStreamError('the decoder gave back another number of symbols or messages', {
      expected: `${unit.symbols.length} symbols in ${unit.messageEnds.length} messages`,
      got: `${symbols.length} symbols in ${messageEnds.length} messages`,
    });
  }
  for (let i = 0; i < symbols.length; i++) {
    if (symbols[i] !== unit.symbols[i]) {
      throw new CorruptStreamError('the decoder gave back another symbol', {
        symbolIndex: i,
        expected: String(unit.symbols[i]),
        got: String(symbols[i]),
      });
    }
  }
  for (let i = 0; i < messageEnds.length; i++) {
    if (messageEnds[i] !== unit.messageEnds[i]) {
      throw new CorruptStreamError('the decoder gave back another end of a message', {
        messageIndex: i,
        expected: String(unit.messageEnds[i]),
        got: String(messageEnds[i]),
      });
    }
  }
  const end =
    coded.messageEndsBits.length === 0
      ? 0
      : coded.messageEndsBits[coded.messageEndsBits.length - 1];
  if (decoded.bitsConsumed !== end) {
    throw new CorruptStreamError('the decoder did not read exactly the carried bits', {
      expected: `${end} bits`,
      got: `${decoded.bitsConsumed} bits`,
    });
  }
}

/** Trains the coder on `sequence` in chunks, as the policy of `setup` says. */
export function trainOn(
  candidate: Candidate,
  setup: Setup,
  sequence: SymbolSequence,
): Tables | undefined {
  const trainer = candidate.create().trainer?.(setup);
  if (trainer === undefined) return undefined;
  trainer.push(sequence);
  return trainer.finish();
}
