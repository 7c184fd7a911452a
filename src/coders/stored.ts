import { InputError } from '../errors/errors.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Coder, Declaration, Price, Setup } from './contract.ts';
import { storedCosts, storedOperations } from './cost-stored.ts';
import { symbolWidth } from './fixed.ts';
import { storedDecoder } from './stored-decoder.ts';
import { innerSetup, isCoded, StoredEncoder } from './stored-encoder.ts';

/**
 * `coder` with a way out: a message that it would make longer is carried as raw symbols. The candidate key `stored=on`.
 *
 * A message is, in this order: one selector bit, booked in `index`; its symbol count, where `lengths` does not grant it; then
 * the coder's own bits (selector 0) or every symbol in ⌈log2 m⌉ bits (selector 1), whichever is shorter once padded; of
 * equals the coder's. So no message passes raw symbols, selector, count and padding.
 *
 * What may surprise:
 * - inside, the coder runs with lengths `known` and align 1, whatever the cell's: the count stands before, and its bits end by
 *   themselves. An arithmetic code string takes about a bit more so than under `link`;
 * - the encoder holds the unit until the end, and codes the messages that stay coded a second time where any is stored raw,
 *   because only then is the account of those alone known;
 * - it exists only where a message decodes alone: an adaptive coder that runs on would have to have seen the raw ones.
 */
export function stored(coder: Coder): Coder {
  const declares = declarationOf(coder.declares);
  return {
    declares,

    check(setup) {
      if (!decodesAlone(setup)) {
        throw new InputError('stored=on needs messages that can be decoded alone', {
          coder: declares.name,
          key: 'stored',
          expected: 'reset message, shipped tables or none',
          got: `tables ${setup.policy}, reset ${setup.reset}`,
          advice:
            'What a coder would learn from a message that is stored raw, its decoder never sees.',
        });
      }
      coder.check?.(innerSetup(setup));
    },

    ...(coder.trainer === undefined
      ? {}
      : { trainer: (setup: Setup) => coder.trainer!(innerSetup(setup)) }),

    encoder: (setup) => new StoredEncoder(coder, setup),

    costs: (setup, _longestCodedBytes, sequence) => storedCosts(coder, setup, sequence),

    operations: (sequence, setup) => storedOperations(coder, sequence, setup),

    decoderHolds: () => 'message',

    growsSteadily: (setup) => coder.growsSteadily?.(innerSetup(setup)) ?? false,

    decoder: (setup, limits) => storedDecoder(coder, setup, limits),

    ...(coder.price === undefined
      ? {}
      : { price: (sequence: SymbolSequence, setup: Setup) => price(coder, sequence, setup) }),

    ...(coder.describeTables === undefined
      ? {}
      : { describeTables: (tables, setup) => coder.describeTables!(tables, innerSetup(setup)) }),
  };
}

function decodesAlone(setup: Setup): boolean {
  return setup.reset === 'message' || setup.policy === 'shipped' || setup.policy === 'none';
}

function declarationOf(inner: Declaration): Declaration {
  return {
    ...inner,
    resets: inner.resets.filter((reset) => reset === 'message'),
    needsWholeMessage: true,
    worstCase: 'n · ⌈log2 m⌉ bits and a selector of 1 bit, beside count and padding',
    memory: `${inner.memory}; encoder the unit, decoder a message`,
  };
}

/** The coder's own price, with the raw bits of the messages that are stored raw; then nothing is told by field. */
function price(coder: Coder, sequence: SymbolSequence, setup: Setup): Price {
  const inner = innerSetup(setup);
  const { perField, ...own } = coder.price!(sequence, inner);
  const encoder = coder.encoder(inner);
  encoder.push(sequence);
  const { messageEndsBits } = encoder.finish();
  const width = symbolWidth(setup.alphabetSize);
  const messageIdealBits = own.messageIdealBits.slice();
  let idealBits = 0;
  let rawMessages = 0;
  let from = 0;
  let fromBits = 0;
  for (let i = 0; i < messageIdealBits.length; i++) {
    const symbolCount = sequence.messageEnds[i] - from;
    if (!isCoded(setup, width, symbolCount, messageEndsBits[i] - fromBits)) {
      messageIdealBits[i] = symbolCount * width;
      rawMessages++;
    }
    idealBits += messageIdealBits[i];
    from = sequence.messageEnds[i];
    fromBits = messageEndsBits[i];
  }
  return {
    ...own,
    ...(perField !== undefined && rawMessages === 0 ? { perField } : {}),
    idealBits,
    messageIdealBits,
  };
}
