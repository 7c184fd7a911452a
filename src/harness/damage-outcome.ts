import { crc32 } from '../bits/crc32.ts';
import type { SymbolArray, SymbolSequence } from '../symbols/sequence.ts';
import { symbolStartOf } from './damage-stretch.ts';

/**
 * Who notices damage: the decoder, which stops with an error; only a check of each message's symbols; neither, though symbols
 * are lost; or nobody, since every symbol came out as it was.
 */
export type DamageVerdict = 'detected' | 'by_check' | 'undetected' | 'harmless';

/** What one damage did. */
export interface DamageOutcome {
  readonly verdict: DamageVerdict;
  /** Symbols that are missing, or not what they were, at their place in their message. */
  readonly symbolsLost: number;
  /** Symbols from the first that is lost to the place from which all are right; 0 where none is lost. */
  readonly recovery: number;
  /** Messages after the damaged ones up to the last that is not right. */
  readonly messagesAfter: number;
}

/** CRC-32 of symbols, each in as many bytes as its array gives it, the low byte first. */
function checkOf(symbols: SymbolArray): number {
  const width = symbols.BYTES_PER_ELEMENT;
  if (symbols instanceof Uint8Array) return crc32(symbols);
  const bytes = new Uint8Array(symbols.length * width);
  for (let i = 0; i < symbols.length; i++)
    for (let b = 0; b < width; b++) bytes[i * width + b] = symbols[i] >>> (8 * b);
  return crc32(bytes);
}

function messageOf(sequence: SymbolSequence, index: number): SymbolArray {
  return sequence.symbols.subarray(symbolStartOf(sequence, index), sequence.messageEnds[index]);
}

/**
 * What became of a stretch in which the messages `from` (inclusive) to `to` (exclusive) were damaged.
 * @param sent     the stretch as it was coded
 * @param decoded  what came out; undefined where the decoder stopped with an error: nothing from the first damaged message on
 *   is then taken for right, since a receiver that was told of damage cannot know where it began
 * @param missing  the damaged messages did not arrive, so that `decoded` has that many fewer
 */
export function damageOutcome(
  sent: SymbolSequence,
  decoded: SymbolSequence | undefined,
  { from, to, missing = false }: { from: number; to: number; missing?: boolean },
): DamageOutcome {
  const { messageEnds, symbols } = sent;
  const start = symbolStartOf(sent, from);
  if (decoded === undefined) {
    const lost = symbols.length - start;
    const messagesAfter = messageEnds.length - to;
    return { verdict: 'detected', symbolsLost: lost, recovery: lost, messagesAfter };
  }
  let symbolsLost = 0;
  let firstWrong = -1;
  let lastWrong = -1;
  let messagesAfter = 0;
  let checked = 0;
  let unchecked = 0;
  const note = (place: number): void => {
    if (firstWrong < 0) firstWrong = place;
    lastWrong = place;
  };
  const gone = missing ? to - from : 0;
  if (missing) {
    const end = symbolStartOf(sent, to);
    symbolsLost = end - start;
    if (symbolsLost > 0) {
      note(start);
      note(end - 1);
    }
  }
  for (let i = missing ? to : from; i < messageEnds.length; i++) {
    const expected = messageOf(sent, i);
    const got = messageOf(decoded, i - gone);
    const at = symbolStartOf(sent, i);
    let wrong = got.length !== expected.length;
    for (let j = 0; j < expected.length; j++) {
      if (j < got.length && got[j] === expected[j]) continue;
      wrong = true;
      symbolsLost++;
      note(at + j);
    }
    // Symbols too many take nobody's place: the message is not right before its end.
    if (got.length > expected.length) note(at + Math.max(0, expected.length - 1));
    if (!wrong) continue;
    if (i >= to) messagesAfter = i - to + 1;
    if (checkOf(got) === checkOf(expected)) unchecked++;
    else checked++;
  }
  const verdict = verdictOf(missing, checked, unchecked);
  const recovery = firstWrong < 0 ? 0 : lastWrong - firstWrong + 1;
  return { verdict, symbolsLost, recovery, messagesAfter };
}

/** A message that did not arrive has no check of its own; those after it that came out wrong have one each. */
function verdictOf(missing: boolean, checked: number, unchecked: number): DamageVerdict {
  if (missing) return checked > 0 ? 'by_check' : 'undetected';
  if (unchecked > 0) return 'undetected';
  return checked > 0 ? 'by_check' : 'harmless';
}
