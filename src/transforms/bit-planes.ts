import { fromPlanes, type Planes, planesOf } from './planes.ts';
import type { Transform } from './transform.ts';

/** ⌈log2 m⌉ planes; one for m = 1 too, which would otherwise leave no trace of how many symbols there were. */
function bitPlanes(alphabetSize: number): Planes {
  return { bits: 1, count: alphabetSize === 1 ? 1 : 32 - Math.clz32(alphabetSize - 1) };
}

/**
 * `bit-planes`: the bits of the symbols, plane by plane within each message: the most significant bit of every symbol first.
 */
export const bitPlanesTransform: Transform = {
  name: 'bit-planes',
  needsWholeMessage: true,
  shape: (alphabetSize) => ({
    alphabetSize: 2,
    symbolsPerSymbol: bitPlanes(alphabetSize).count,
  }),
  forward: (alphabetSize) => planesOf(bitPlanes(alphabetSize)),
  inverse: (alphabetSize) => fromPlanes(bitPlanes(alphabetSize), alphabetSize),
};
