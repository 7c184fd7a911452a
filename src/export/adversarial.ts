import { SeededGenerator } from '../statistics/generator.ts';
import { newSymbolArray, type SymbolSequence } from '../symbols/sequence.ts';

/** How the symbols of a message are drawn; each stands for something that breaks careless code. */
const KINDS = ['uniform', 'run', 'alternating', 'rising', 'least', 'greatest', 'few'] as const;

/** Longest of the many short messages, in units, and of the few long ones. */
const SHORT_UNITS = 40;
const LONG_UNITS = 1500;
/** One message in so many is long. */
const LONG_EVERY = 500;

/**
 * Messages that no training data look like: empty ones, lone symbols, runs, extremes, uniform noise.
 * @param unitSymbols  messages are whole units of so many symbols
 */
export function adversarialMessages(
  alphabetSize: number,
  unitSymbols: number,
  count: number,
  seed: number,
): SymbolSequence {
  const random = new SeededGenerator(seed);
  const below = (n: number): number => random.integer(0, n - 1);
  const sizes = Array.from({ length: count }, (_, i) => {
    if (i < 2) return i;
    return i % LONG_EVERY === LONG_EVERY - 1 ? below(LONG_UNITS) : below(SHORT_UNITS);
  });
  const total = sizes.reduce((sum, size) => sum + size, 0) * unitSymbols;
  const symbols = newSymbolArray(alphabetSize, total);
  const messageEnds = new Uint32Array(count);
  let at = 0;
  sizes.forEach((size, message) => {
    const end = at + size * unitSymbols;
    const kind = KINDS[message % KINDS.length];
    const base = below(alphabetSize);
    const other = below(alphabetSize);
    for (let i = 0; at < end; i++) {
      symbols[at++] =
        kind === 'uniform'
          ? below(alphabetSize)
          : kind === 'run'
            ? base
            : kind === 'alternating'
              ? i % 2 === 0
                ? base
                : other
              : kind === 'rising'
                ? (base + i) % alphabetSize
                : kind === 'least'
                  ? 0
                  : kind === 'greatest'
                    ? alphabetSize - 1
                    : Math.min(alphabetSize - 1, below(4));
    }
    messageEnds[message] = end;
  });
  return { alphabetSize, symbols, messageEnds };
}
