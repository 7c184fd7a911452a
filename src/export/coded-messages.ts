import type { Coder, Setup } from '../coders/contract.ts';
import { CorruptStreamError, LimitError } from '../errors/errors.ts';
import type { SymbolArray, SymbolSequence } from '../symbols/sequence.ts';

/** One message and what the program itself makes of it. */
export interface CodedMessage {
  readonly symbols: SymbolArray;
  readonly bytes: Uint8Array;
}

/** Codes messages with the program's own encoder and cuts the result at their ends, which are whole bytes. */
export function codedMessages(
  coder: Coder,
  setup: Setup,
  sequence: SymbolSequence,
): CodedMessage[] {
  const encoder = coder.encoder(setup);
  encoder.push(sequence);
  const coded = encoder.finish();
  let from = 0;
  let byte = 0;
  return Array.from(sequence.messageEnds, (end, i) => {
    const byteEnd = coded.messageEndsBits[i] / 8;
    const message = {
      symbols: sequence.symbols.subarray(from, end),
      bytes: coded.bytes.subarray(byte, byteEnd),
    };
    from = end;
    byte = byteEnd;
    return message;
  });
}

/**
 * What the program's own decoder makes of the bytes of one message; undefined where it refuses them.
 * @param count  the symbols of the message, where the framing grants them, else the most that are allowed
 */
export function messageDecoder(
  coder: Coder,
  setup: Setup,
  count: number,
): (bytes: Uint8Array) => SymbolArray | undefined {
  const decoder = coder.decoder(setup, { maxSymbols: count });
  return (bytes) => {
    try {
      const { sequence } = decoder.decode({
        bytes,
        messageCount: 1,
        ...(setup.lengths === 'link' ? { messageEndsBits: Float64Array.of(bytes.length * 8) } : {}),
        ...(setup.lengths === 'known' ? { symbolCounts: Uint32Array.of(count) } : {}),
      });
      return sequence.symbols;
    } catch (error) {
      if (error instanceof CorruptStreamError || error instanceof LimitError) return undefined;
      throw error;
    }
  };
}
