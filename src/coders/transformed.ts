import { InputError, LimitError } from '../errors/errors.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { TransformChain } from '../transforms/chain.ts';
import type { CodedInput, Coder, Declaration, Decoder, Setup } from './contract.ts';
import { atBothEnds, remembered, stackOperations, sumOf } from './cost.ts';
import { chainCosts, chainOperations, perProductSymbol } from './cost-steps.ts';

/**
 * `coder` fed with what `chain` makes of the symbols: the candidate key `after`.
 *
 * What may surprise:
 * - each message starts the chain anew where messages start the coder anew (reset `message`, `shipped`, no tables); under
 *   reset `never` the chain runs on over message ends, in training too; in training it also runs on over units of a fill;
 * - a symbol count that the coder writes is the count after the chain, which `byte-planes` and `bit-planes` multiply;
 * - the price has no fit: a chain has no best member (docs/account.md).
 */
export function transformed(coder: Coder, chain: TransformChain): Coder {
  const declares = declarationOf(coder.declares, chain);
  const innerSetup = (setup: Setup): Setup => ({
    ...setup,
    alphabetSize: chain.shape(setup.alphabetSize).alphabetSize,
    ...(setup.unitSymbols === undefined
      ? {}
      : { unitSymbols: setup.unitSymbols * chain.shape(setup.alphabetSize).symbolsPerSymbol }),
  });
  const forward = (setup: Setup) => chain.forward(setup.alphabetSize, runsOn(setup));

  const innerUnit = remembered((sequence, setup) => ({
    sequence: forward(setup).push(sequence),
    setup: innerSetup(setup),
  }));

  return {
    declares,

    check(setup) {
      const inner = innerSetup(setup);
      if (inner.alphabetSize > coder.declares.maxAlphabetSize) {
        throw new InputError(`the alphabet after ${chain.name} is too large for ${declares.name}`, {
          coder: declares.name,
          key: 'after',
          expected: `at most ${coder.declares.maxAlphabetSize} symbols`,
          got: String(inner.alphabetSize),
        });
      }
      coder.check?.(inner);
    },

    ...(coder.trainer === undefined
      ? {}
      : {
          trainer(setup: Setup) {
            const trainer = coder.trainer!(innerSetup(setup));
            // A message holds several units of the train split, and only its first begins the chain.
            const overUnits = setup.fill !== undefined && !chain.needsWholeMessage;
            const pass = chain.forward(setup.alphabetSize, overUnits || runsOn(setup));
            return {
              push: (chunk) => trainer.push(pass.push(chunk)),
              finish: () => {
                pass.finish();
                return trainer.finish();
              },
            };
          },
        }),

    encoder(setup) {
      const encoder = coder.encoder(innerSetup(setup));
      const pass = forward(setup);
      return {
        push: (chunk) => encoder.push(pass.push(chunk)),
        finish: () => {
          pass.finish();
          return encoder.finish();
        },
      };
    },

    growsSteadily: (setup) =>
      !chain.needsWholeMessage && (coder.growsSteadily?.(innerSetup(setup)) ?? false),

    decoder(setup, limits): Decoder {
      const { symbolsPerSymbol } = chain.shape(setup.alphabetSize);
      const decoder = coder.decoder(innerSetup(setup), {
        maxSymbols: limits.maxSymbols * symbolsPerSymbol,
      });
      return {
        decode(input) {
          const { sequence, bitsConsumed } = decoder.decode(innerInput(input, symbolsPerSymbol));
          const pass = chain.inverse(setup.alphabetSize, runsOn(setup));
          return { sequence: pass.push(sequence), bitsConsumed };
        },
      };
    },

    ...(coder.price === undefined
      ? {}
      : {
          price(sequence: SymbolSequence, setup: Setup) {
            const transformedSequence = forward(setup).push(sequence);
            const { fit, ...price } = coder.price!(transformedSequence, innerSetup(setup));
            return price;
          },
        }),

    ...(coder.costs === undefined
      ? {}
      : {
          costs(setup: Setup, longestCodedBytes: number, sequence: SymbolSequence) {
            const unit = innerUnit(sequence, setup);
            const inner = coder.costs!(unit.setup, longestCodedBytes, unit.sequence);
            const steps = chainCosts(chain, setup, sequence);
            return inner && steps && atBothEnds(inner, steps, sumOf);
          },
        }),

    ...(coder.operations === undefined
      ? {}
      : {
          operations(sequence: SymbolSequence, setup: Setup) {
            const { symbolsPerSymbol } = chain.shape(setup.alphabetSize);
            const unit = innerUnit(sequence, setup);
            const inner = coder.operations!(unit.sequence, unit.setup);
            const steps = chainOperations(chain, sequence);
            if (inner === undefined || steps === undefined) return undefined;
            return stackOperations(
              steps,
              perProductSymbol(inner, sequence.symbols.length, symbolsPerSymbol),
            );
          },
        }),

    ...(coder.decoderHolds === undefined
      ? {}
      : {
          decoderHolds: (setup: Setup) =>
            chain.needsWholeMessage ? ('message' as const) : coder.decoderHolds!(innerSetup(setup)),
        }),

    ...(coder.describeTables === undefined
      ? {}
      : { describeTables: (tables, setup) => coder.describeTables!(tables, innerSetup(setup)) }),
  };
}

/** Whether what came before counts on over message ends. */
function runsOn(setup: Setup): boolean {
  return setup.reset === 'never' && setup.policy !== 'shipped' && setup.policy !== 'none';
}

function declarationOf(inner: Declaration, chain: TransformChain): Declaration {
  return {
    ...inner,
    needsWholeMessage: inner.needsWholeMessage || chain.needsWholeMessage,
    // Planes bring any alphabet down to bytes or bits; the other steps leave it as it is.
    maxAlphabetSize: chain.needsWholeMessage ? 2 ** 32 : inner.maxAlphabetSize,
  };
}

/** What the coder inside is told of the lengths: symbol counts after the chain. */
function innerInput(input: CodedInput, symbolsPerSymbol: number): CodedInput {
  const { symbolCounts, startOf } = input;
  if (symbolsPerSymbol === 1 || symbolCounts === undefined) return input;
  const innerCounts = new Uint32Array(symbolCounts.length);
  const scale = (messageIndex: number) => {
    const count = symbolCounts[messageIndex] * symbolsPerSymbol;
    if (count > 2 ** 32 - 1) {
      throw new LimitError('a message has more symbols than can be counted after its steps', {
        messageIndex,
        expected: 'at most 2^32 − 1',
        got: String(count),
      });
    }
    innerCounts[messageIndex] = count;
  };
  if (startOf === undefined) {
    for (let i = 0; i < innerCounts.length; i++) scale(i);
    return { ...input, symbolCounts: innerCounts };
  }
  return {
    ...input,
    symbolCounts: innerCounts,
    startOf(messageIndex, endBits) {
      const start = startOf(messageIndex, endBits);
      scale(messageIndex);
      return start;
    },
  };
}
