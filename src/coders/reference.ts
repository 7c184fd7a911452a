import { BitReader } from '../bits/bit-reader.ts';
import { BitWriter } from '../bits/bit-writer.ts';
import { CorruptStreamError, InputError, LimitError } from '../errors/errors.ts';
import { newSymbolArray } from '../symbols/sequence.ts';
import type { Coder, Declaration, DecodeLimits, Decoder, Encoder, Setup } from './contract.ts';
import { MessageWalk } from './message-frame.ts';
import { MessageLedger } from './message-ledger.ts';
import { wholeMessages } from './message-pieces.ts';
import type { ByteMethod } from './reference-library.ts';
import { bytesPerSymbol, bytesToSymbols, symbolsToBytes } from './reference-symbols.ts';
import { growSymbols } from './symbol-buffer.ts';

/** What the declarations of all references have in common. */
export const referenceTraits = {
  resets: ['message'],
  needsWholeMessage: true,
  reference: true,
  maxAlphabetSize: 2 ** 32,
} as const satisfies Partial<Declaration>;

/**
 * A coder of `declaration` on top of a general-purpose byte coder. Each message is a stream of its own.
 *
 * Nothing is booked in `framing` under any lengths rule: the stream marks its own end, and the decoded byte count gives the
 * symbol count. An empty message takes 0 bits where `known` or `link` already tells that it is empty; under `sent` it
 * is the stream of no bytes. The stream is whole bytes, so under an align of 1 its last, partly used byte counts as written.
 * What is decoded may be wrong without any error: the streams carry no checksum.
 *
 * @param methodOf  the byte coder under this setup
 */
export function referenceCoder(
  declaration: Declaration,
  methodOf: (setup: Setup) => ByteMethod,
): Coder {
  return {
    declares: declaration,
    check(setup) {
      if (declaration.policies.includes(setup.policy) && setup.reset === 'message') return;
      throw new InputError(`${declaration.name} codes each message apart`, {
        coder: declaration.name,
        expected: `tables ${declaration.policies.join(', ')}; reset message`,
        got: `tables ${setup.policy}; reset ${setup.reset}`,
      });
    },
    decoderHolds: () => 'message',
    encoder: (setup) => referenceEncoder(setup, methodOf(setup)),
    decoder: (setup, limits) => referenceDecoder(setup, limits, methodOf(setup)),
  };
}

function referenceEncoder(setup: Setup, method: ByteMethod): Encoder {
  const width = bytesPerSymbol(setup.alphabetSize);
  const writer = new BitWriter();
  const ledger = new MessageLedger(setup.align);
  const messages = wholeMessages((symbols, from, to) => {
    if (to > from || setup.lengths === 'sent') {
      const stream = method.compress(symbolsToBytes(symbols, from, to, width));
      writer.writeBytes(stream);
      ledger.writtenBits += stream.length * 8;
      ledger.payloadBits += stream.length * 8;
    }
    ledger.close(writer);
  });
  return {
    push: (chunk) => messages.push(chunk),
    finish: () => {
      messages.finish();
      return ledger.finish(writer);
    },
  };
}

function referenceDecoder(setup: Setup, limits: DecodeLimits, method: ByteMethod): Decoder {
  const { alphabetSize, lengths } = setup;
  const width = bytesPerSymbol(alphabetSize);
  return {
    decode(input) {
      const reader = new BitReader(input.bytes);
      const walk = new MessageWalk(reader, setup, input, limits);
      let symbols = newSymbolArray(alphabetSize, 0);
      let filled = 0;
      for (let i = 0; i < input.messageCount; i++) {
        walk.open();
        const granted = lengths === 'known' ? input.symbolCounts![i] : undefined;
        if (granted !== undefined) walk.book(granted);
        const from = reader.position / 8;
        const isEmpty = lengths === 'link' ? reader.limit === reader.position : granted === 0;
        if (isEmpty) {
          if (granted === undefined) walk.book(0);
          walk.close(reader.position);
          continue;
        }
        const most = granted ?? limits.maxSymbols - filled;
        const found = method.decompress(
          input.bytes.subarray(from, Math.floor(reader.limit / 8)),
          most * width,
        );
        if (found === undefined && granted === undefined) {
          throw new LimitError('the coded bytes hold more symbols than allowed', {
            messageIndex: i,
            bitOffset: reader.position,
            expected: `at most ${limits.maxSymbols}`,
          });
        }
        const count = found === undefined ? Number.NaN : found.content.length / width;
        const whole = Number.isInteger(count) && (granted === undefined || granted === count);
        if (found === undefined || !whole || (count === 0 && lengths !== 'sent')) {
          throw new CorruptStreamError('a message does not hold the symbols it should', {
            messageIndex: i,
            bitOffset: reader.position,
            expected: granted === undefined ? 'whole symbols' : `${granted} symbols`,
            got: found === undefined ? 'more' : `${found.content.length} bytes, ${width} a symbol`,
          });
        }
        if (granted === undefined) walk.book(count);
        symbols = growSymbols(symbols, alphabetSize, filled, count);
        bytesToSymbols(found.content, width, alphabetSize, symbols, filled);
        filled += count;
        walk.close((from + found.usedBytes) * 8);
      }
      return {
        sequence: {
          alphabetSize,
          symbols: symbols.subarray(0, filled),
          messageEnds: walk.messageEnds,
        },
        bitsConsumed: reader.position,
      };
    },
  };
}
