import { newSymbolArray, type SymbolArray, type SymbolChunk } from '../symbols/sequence.ts';
import type { Transform, TransformPass } from './transform.ts';

/** One direction of a step that turns each symbol into one symbol of the same alphabet. */
export interface SymbolKernel {
  /** Back to the state before the first symbol. */
  restart(): void;
  /** `target[i]` from `source[i]` and the symbols before, for i = from … to − 1. */
  apply(source: SymbolArray, target: SymbolArray, from: number, to: number): void;
}

/** What {@link symbolwise} makes a transform of. */
export interface SymbolwiseStep {
  readonly name: string;
  /** Throws InputError where the step cannot take the alphabet. Absent: it takes any. */
  check?(alphabetSize: number): void;
  forward(alphabetSize: number): SymbolKernel;
  inverse(alphabetSize: number): SymbolKernel;
}

/** A transform that keeps alphabet and symbol count. */
export function symbolwise(step: SymbolwiseStep): Transform {
  return {
    name: step.name,
    needsWholeMessage: false,
    shape(alphabetSize) {
      step.check?.(alphabetSize);
      return { alphabetSize, symbolsPerSymbol: 1 };
    },
    forward: (alphabetSize, runsOn) => passOf(step.forward(alphabetSize), runsOn),
    inverse: (alphabetSize, runsOn) => passOf(step.inverse(alphabetSize), runsOn),
  };
}

function passOf(kernel: SymbolKernel, runsOn: boolean): TransformPass {
  return {
    push(chunk): SymbolChunk {
      const { symbols, messageEnds } = chunk;
      const target = newSymbolArray(chunk.alphabetSize, symbols.length);
      if (runsOn) {
        kernel.apply(symbols, target, 0, symbols.length);
      } else {
        let from = 0;
        for (let i = 0; i < messageEnds.length; i++) {
          const to = messageEnds[i];
          kernel.apply(symbols, target, from, to);
          kernel.restart();
          from = to;
        }
        kernel.apply(symbols, target, from, symbols.length);
      }
      return { ...chunk, symbols: target };
    },
    // Whoever takes the chunks sees the open message itself.
    finish() {},
  };
}
