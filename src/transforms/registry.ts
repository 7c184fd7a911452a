import { InputError } from '../errors/errors.ts';
import { nearestWord } from '../errors/nearest.ts';
import { bitPlanesTransform } from './bit-planes.ts';
import { bytePlanesTransform } from './byte-planes.ts';
import { delta } from './delta.ts';
import { delta2 } from './delta2.ts';
import { lagTransform } from './lag.ts';
import type { Transform } from './transform.ts';
import { xorTransform } from './xor.ts';
import { zigzag } from './zigzag.ts';

/** Furthest that a step looks back, in symbols. */
const LARGEST_LAG = 65_536;

/** A step as a chain names it; one whose word ends in N takes a number there. */
interface TransformFamily {
  readonly word: string;
  /** One line. */
  readonly summary: string;
  create(lag: number): Transform;
}

/** Every step there is. */
export const transformFamilies: readonly TransformFamily[] = [
  { word: 'delta', summary: 'difference to the symbol before, modulo m', create: () => delta },
  {
    word: 'delta2',
    summary: 'difference to the straight line through the two symbols before, modulo m',
    create: () => delta2,
  },
  { word: 'lagN', summary: 'difference to the symbol N back, modulo m', create: lagTransform },
  {
    word: 'zigzag',
    summary: 'residues modulo m in order of size: 0, −1, 1, −2 … become 0, 1, 2, 3 …',
    create: () => zigzag,
  },
  {
    word: 'xor',
    summary: 'bits that differ from the symbol before; m a power of two',
    create: () => xorTransform('xor', 1),
  },
  {
    word: 'xorN',
    summary: 'bits that differ from the symbol N back; m a power of two',
    create: (lag) => xorTransform(`xor${lag}`, lag),
  },
  {
    word: 'byte-planes',
    summary: 'the bytes of symbols above 256, plane by plane within each message',
    create: () => bytePlanesTransform,
  },
  {
    word: 'bit-planes',
    summary: 'the bits of the symbols, plane by plane within each message, highest first',
    create: () => bitPlanesTransform,
  },
];

/**
 * The step of that name.
 * @throws InputError for an unknown name, with the nearest, or a number out of range
 */
export function parseTransform(text: string): Transform {
  const plain = transformFamilies.find(({ word }) => word === text && !word.endsWith('N'));
  if (plain !== undefined) return plain.create(1);
  const parts = /^([a-z-]+?)(\d+)$/.exec(text);
  const numbered = transformFamilies.find(({ word }) => word === `${parts?.[1] ?? text}N`);
  if (numbered !== undefined) {
    const lag = parts === null ? Number.NaN : Number(parts[2]);
    if (lag >= 1 && lag <= LARGEST_LAG) return numbered.create(lag);
    throw new InputError(`the step ${numbered.word} of after= needs a number for N`, {
      key: 'after',
      expected: `${numbered.word} with N from 1 to ${LARGEST_LAG}`,
      got: text,
    });
  }
  const words = transformFamilies.map(({ word }) => word);
  const near = nearestWord(text, words);
  throw new InputError(`there is no step ${JSON.stringify(text)} for after=`, {
    key: 'after',
    expected: `steps joined by dots, out of ${words.join(', ')}`,
    got: text,
    advice:
      near === undefined
        ? `${transformFamilies.map(({ word, summary }) => `${word}: ${summary}`).join('. ')}.`
        : `Did you mean ${near}?`,
  });
}
