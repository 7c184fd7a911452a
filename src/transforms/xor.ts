import { InputError } from '../errors/errors.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import { SymbolHistory } from './symbol-history.ts';
import { type SymbolKernel, symbolwise } from './symbolwise.ts';
import type { Transform } from './transform.ts';

/**
 * `xorN`: the bits in which a symbol differs from the one N back; where N back lies before the start, the symbol itself.
 * `xor` is `xor1`. The alphabet must be a power of two, or symbols outside it would come out.
 * @param name  as the chain writes it
 * @param lag   N, 1 or more
 */
export function xorTransform(name: string, lag: number): Transform {
  return symbolwise({
    name,
    check(alphabetSize) {
      if (Number.isInteger(Math.log2(alphabetSize))) return;
      throw new InputError(`the step ${name} cannot take an alphabet of ${alphabetSize} symbols`, {
        key: 'after',
        expected: 'a power of two, so that every pattern of bits is a symbol',
        got: String(alphabetSize),
        advice: 'Take delta or lagN, which take any alphabet.',
      });
    },
    forward: () => new BitDifference(lag, 'forward'),
    inverse: () => new BitDifference(lag, 'inverse'),
  });
}

class BitDifference implements SymbolKernel {
  readonly #history: SymbolHistory;
  /** The plain symbol is what is remembered: forward the source holds it, on the way back the target. */
  readonly #sourceIsPlain: boolean;

  constructor(lag: number, direction: 'forward' | 'inverse') {
    this.#history = new SymbolHistory(lag);
    this.#sourceIsPlain = direction === 'forward';
  }

  restart(): void {
    this.#history.restart();
  }

  apply(source: SymbolArray, target: SymbolArray, from: number, to: number): void {
    const sourceIsPlain = this.#sourceIsPlain;
    const history = this.#history;
    const { ring } = history;
    const lag = ring.length;
    let { slot } = history;
    // Up to here nothing stands so far back in the message.
    const known = Math.min(to, from + lag - history.seen);
    for (let i = from; i < known; i++) {
      const symbol = source[i];
      target[i] = symbol;
      ring[slot] = symbol;
      if (++slot === lag) slot = 0;
    }
    for (let i = known; i < to; i++) {
      const symbol = source[i];
      const other = (symbol ^ ring[slot]) >>> 0;
      target[i] = other;
      ring[slot] = sourceIsPlain ? symbol : other;
      if (++slot === lag) slot = 0;
    }
    history.slot = slot;
    history.seen = Math.min(lag, history.seen + to - from);
  }
}
