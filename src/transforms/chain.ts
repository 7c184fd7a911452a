import type { SymbolChunk } from '../symbols/sequence.ts';
import { parseTransform } from './registry.ts';
import type { Transform, TransformPass, TransformShape } from './transform.ts';

/** Steps one after another, as `after=delta.zigzag` gives them: read left to right on the way to the coder. */
export class TransformChain implements Transform {
  /** As it is written. */
  readonly name: string;
  readonly needsWholeMessage: boolean;
  readonly #steps: readonly Transform[];

  constructor(steps: readonly Transform[]) {
    this.#steps = steps;
    this.name = steps.map(({ name }) => name).join('.');
    this.needsWholeMessage = steps.some((step) => step.needsWholeMessage);
  }

  shape(alphabetSize: number): TransformShape {
    let shape: TransformShape = { alphabetSize, symbolsPerSymbol: 1 };
    for (const step of this.#steps) {
      const next = step.shape(shape.alphabetSize);
      shape = {
        alphabetSize: next.alphabetSize,
        symbolsPerSymbol: shape.symbolsPerSymbol * next.symbolsPerSymbol,
      };
    }
    return shape;
  }

  forward(alphabetSize: number, runsOn: boolean): TransformPass {
    const before = this.#alphabetsBefore(alphabetSize);
    return inTurn(this.#steps.map((step, i) => step.forward(before[i], runsOn)));
  }

  inverse(alphabetSize: number, runsOn: boolean): TransformPass {
    const before = this.#alphabetsBefore(alphabetSize);
    return inTurn(this.#steps.map((step, i) => step.inverse(before[i], runsOn)).reverse());
  }

  /** The alphabet that each step takes. */
  #alphabetsBefore(alphabetSize: number): number[] {
    const before: number[] = [];
    let size = alphabetSize;
    for (const step of this.#steps) {
      before.push(size);
      size = step.shape(size).alphabetSize;
    }
    return before;
  }
}

function inTurn(passes: readonly TransformPass[]): TransformPass {
  return {
    push: (chunk) => passes.reduce((given: SymbolChunk, pass) => pass.push(given), chunk),
    finish: () => {
      for (const pass of passes) pass.finish();
    },
  };
}

/**
 * The chain behind a text of steps joined by dots.
 * @throws InputError for a step there is none of, or one whose number is out of range
 */
export function parseTransformChain(text: string): TransformChain {
  return new TransformChain(text.split('.').map((step) => parseTransform(step.trim())));
}
