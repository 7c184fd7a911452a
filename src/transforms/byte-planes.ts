import { InputError } from '../errors/errors.ts';
import { fromPlanes, type Planes, planesOf } from './planes.ts';
import type { Transform } from './transform.ts';

function bytePlanes(alphabetSize: number): Planes {
  return { bits: 8, count: alphabetSize <= 2 ** 16 ? 2 : alphabetSize <= 2 ** 24 ? 3 : 4 };
}

/**
 * `byte-planes`: the bytes of larger symbols, plane by plane within each message: first the most significant byte of every
 * symbol, then the next of every symbol, and so on. Symbols of up to 16, 24 or 32 bits become 2, 3 or 4 bytes.
 */
export const bytePlanesTransform: Transform = {
  name: 'byte-planes',
  needsWholeMessage: true,
  shape(alphabetSize) {
    if (alphabetSize <= 256) {
      throw new InputError(
        `the step byte-planes has nothing to take apart in an alphabet of ${alphabetSize} symbols`,
        {
          key: 'after',
          expected: 'more than 256 symbols, which take two bytes or more',
          got: String(alphabetSize),
          advice: 'Leave the step out, or take bit-planes.',
        },
      );
    }
    return { alphabetSize: 256, symbolsPerSymbol: bytePlanes(alphabetSize).count };
  },
  forward: (alphabetSize) => planesOf(bytePlanes(alphabetSize)),
  inverse: (alphabetSize) => fromPlanes(bytePlanes(alphabetSize), alphabetSize),
};
