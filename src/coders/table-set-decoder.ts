import { BitReader } from '../bits/bit-reader.ts';
import { type BitassayError, CorruptStreamError, LimitError } from '../errors/errors.ts';
import { newSymbolArray } from '../symbols/sequence.ts';
import type {
  CodedInput,
  Coder,
  Decoded,
  DecodeLimits,
  Decoder,
  Setup,
  Tables,
} from './contract.ts';
import { MessageWalk } from './message-frame.ts';
import { growSymbols } from './symbol-buffer.ts';

/** Reads each message's selector, then has that table's decoder read the one message where it stands. */
export function tableSetDecoder(
  coder: Coder,
  setup: Setup,
  sets: readonly Tables[],
  selectorBits: number,
  limits: DecodeLimits,
): Decoder {
  const decoders = sets.map((tables) => coder.decoder({ ...setup, tables }, limits));
  return { decode: (input) => decodeMessages(input, setup, decoders, selectorBits, limits) };
}

function decodeMessages(
  input: CodedInput,
  setup: Setup,
  decoders: readonly Decoder[],
  selectorBits: number,
  limits: DecodeLimits,
): Decoded {
  const { alphabetSize, lengths } = setup;
  const reader = new BitReader(input.bytes);
  // Checks what the framing grants; keeps the ends.
  const walk = new MessageWalk(reader, setup, input, limits);
  let symbols = newSymbolArray(alphabetSize, 0);
  let filled = 0;
  for (let i = 0; walk.open(); i++) {
    const granted = input.symbolCounts?.[i];
    const isEmpty =
      (lengths === 'known' && granted === 0) ||
      (lengths === 'link' && input.messageEndsBits![i] === reader.position);
    const table = isEmpty ? 0 : reader.readBits(selectorBits);
    if (table >= decoders.length) {
      throw new CorruptStreamError('a message names a table that is not in the set', {
        messageIndex: i,
        bitOffset: reader.position,
        expected: `below ${decoders.length}`,
        got: String(table),
      });
    }
    const start = reader.position;
    const { sequence, bitsConsumed } = decodeOne(decoders[table], i, {
      bytes: input.bytes,
      messageCount: 1,
      ...(lengths === 'link' ? { messageEndsBits: input.messageEndsBits!.subarray(i, i + 1) } : {}),
      ...(lengths === 'known' ? { symbolCounts: Uint32Array.of(granted!) } : {}),
      startOf: () => start,
    });
    const count = sequence.symbols.length;
    walk.book(count);
    symbols = growSymbols(symbols, alphabetSize, filled, count);
    symbols.set(sequence.symbols, filled);
    filled += count;
    walk.close(bitsConsumed);
  }
  return {
    sequence: {
      alphabetSize,
      symbols: symbols.subarray(0, filled),
      messageEnds: walk.messageEnds,
    },
    bitsConsumed: reader.position,
  };
}

/** What is wrong is told of the message's place in the unit; the decoder knows only the one. */
function decodeOne(decoder: Decoder, messageIndex: number, input: CodedInput): Decoded {
  try {
    return decoder.decode(input);
  } catch (error) {
    const place = (error as Partial<BitassayError>).where;
    if (error instanceof CorruptStreamError)
      throw new CorruptStreamError(error.message, { ...place, messageIndex });
    if (error instanceof LimitError)
      throw new LimitError(error.message, { ...place, messageIndex });
    throw error;
  }
}
