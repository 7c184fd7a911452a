import { CorruptStreamError, InputError } from '../errors/errors.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import { type MessageData, sequenceOf } from './memory-corpus.ts';

/** A product's own encoder and decoder of one message. */
export interface OwnCodec {
  encode(message: SymbolArray): Uint8Array | Promise<Uint8Array>;
  /** Given nothing but what `encode` returned. */
  decode(coded: Uint8Array): ArrayLike<number> | Promise<ArrayLike<number>>;
}

/** What messages take in whole bytes. */
export interface OwnRate {
  readonly symbolCount: number;
  readonly messageCount: number;
  readonly carriedBits: number;
  readonly bitsPerSymbol: number;
  readonly messageBits: Float64Array;
}

function compare(decoded: ArrayLike<number>, message: SymbolArray, messageIndex: number): void {
  if (decoded.length !== message.length) {
    throw new CorruptStreamError('the decoder gave back another number of symbols', {
      messageIndex,
      expected: String(message.length),
      got: String(decoded.length),
    });
  }
  for (let i = 0; i < message.length; i++) {
    if (decoded[i] === message[i]) continue;
    throw new CorruptStreamError('the decoder gave back another symbol', {
      messageIndex,
      symbolIndex: i,
      expected: String(message[i]),
      got: String(decoded[i]),
    });
  }
}

/**
 * Codes each message with a product's own codec, decodes it, compares, and says what it took. The decoder is given a copy of
 * the coded bytes; both run in this process, so what they share besides is not seen.
 * @throws CorruptStreamError at the first difference, with its message; InputError when `encode` returns no bytes
 */
export async function rateOfOwn(data: MessageData, codec: OwnCodec): Promise<OwnRate> {
  const { symbols, messageEnds } = sequenceOf(data);
  const messageBits = new Float64Array(messageEnds.length);
  let from = 0;
  let carriedBits = 0;
  for (let i = 0; i < messageEnds.length; i++) {
    const message = symbols.subarray(from, messageEnds[i]);
    from = messageEnds[i];
    const coded = await codec.encode(message.slice());
    if (!(coded instanceof Uint8Array)) {
      throw new InputError('encode returned no Uint8Array', { messageIndex: i });
    }
    compare(await codec.decode(coded.slice()), message, i);
    messageBits[i] = coded.length * 8;
    carriedBits += messageBits[i];
  }
  return {
    symbolCount: symbols.length,
    messageCount: messageBits.length,
    carriedBits,
    bitsPerSymbol: symbols.length === 0 ? 0 : carriedBits / symbols.length,
    messageBits,
  };
}
