import { BugError, CorruptStreamError, InputError } from '../errors/errors.ts';
import { type AlphabetMap, alphabetMapSize } from '../symbols/alphabet-map.ts';
import { oneSegment } from '../symbols/segments.ts';
import { newSymbolArray, type SymbolArray } from '../symbols/sequence.ts';
import { parseSymbolTaker, symbolTakerFamilies } from '../symbols/takers/registry.ts';
import type { SymbolTaker } from '../symbols/takers/taker.ts';

/** A taker whose symbols say everything about the bytes they were taken from. */
export type LosslessTaker = SymbolTaker & Required<Pick<SymbolTaker, 'untake'>>;

function isLossless(taker: SymbolTaker): taker is LosslessTaker {
  return taker.untake !== undefined;
}

/**
 * The taker behind a text, if a file can be given back from its symbols.
 * @throws InputError for an unknown taker, and for one that leaves out a part of the file
 */
export function takerOf(symbolsAs: string): LosslessTaker {
  const taker = parseSymbolTaker(symbolsAs);
  if (isLossless(taker)) return taker;
  const usable = symbolTakerFamilies
    .filter((family) => !family.word.endsWith(':') && isLossless(family.create('')))
    .map((family) => family.word);
  throw new InputError(
    `${taker.text} takes only a part of a file, so the file could not be given back`,
    {
      expected: `symbols as ${usable.join(', ')}`,
      got: taker.text,
      advice: 'bitassay try measures such symbols without writing a file.',
    },
  );
}

/** Size of the alphabet, at least 1; the map must be there exactly where the taker has no alphabet of its own. */
export function alphabetSizeOf(taker: LosslessTaker, map: AlphabetMap | undefined): number {
  // What an empty file gives has the taker's own alphabet, or the kind of map that it needs.
  const empty = takeContent(taker, new Uint8Array(0), '');
  if (map !== undefined && map.kind === empty.map?.kind) return Math.max(1, alphabetMapSize(map));
  if (map === undefined && empty.map === undefined) return empty.alphabetSize;
  throw new CorruptStreamError(`the container’s alphabet map does not go with ${taker.text}`, {
    expected: empty.map === undefined ? 'no map' : `a map of ${empty.map.kind}`,
    got: map === undefined ? 'none' : `a map of ${map.kind}`,
  });
}

/** Symbols of a whole file, with the map that says what they stand for where that was found in the file. */
export interface TakenContent {
  readonly symbols: SymbolArray;
  readonly alphabetSize: number;
  readonly map?: AlphabetMap;
}

/** @throws InputError when the bytes are not what the taker reads */
export function takeContent(taker: LosslessTaker, content: Uint8Array, file: string): TakenContent {
  const { values } = taker.take({ file, bytes: content, segments: oneSegment(content.length) });
  if (values.kind === 'symbols') return values;
  if (values.kind === 'code-points') return mapCodePoints(values.codePoints);
  throw new BugError(`${taker.text} gives ${values.kind}, from which no file can be made again`);
}

/** Ids in the order of the code points, over those that occur. */
function mapCodePoints(codePoints: Uint32Array): TakenContent {
  let size = 0;
  for (let i = 0; i < codePoints.length; i++) size = Math.max(size, codePoints[i] + 1);
  const idOf = new Int32Array(size).fill(-1);
  for (let i = 0; i < codePoints.length; i++) idOf[codePoints[i]] = 0;
  const values: number[] = [];
  for (let value = 0; value < size; value++) {
    if (idOf[value] === 0) idOf[value] = values.push(value) - 1;
  }
  const map: AlphabetMap = { kind: 'code-points', values: Uint32Array.from(values) };
  const alphabetSize = Math.max(1, values.length);
  const symbols = newSymbolArray(alphabetSize, codePoints.length);
  for (let i = 0; i < codePoints.length; i++) symbols[i] = idOf[codePoints[i]];
  return { symbols, alphabetSize, map };
}

/** The bytes that {@link takeContent} got. Throws CorruptStreamError when no bytes give these symbols. */
export function restoreContent(
  taker: LosslessTaker,
  symbols: SymbolArray,
  map: AlphabetMap | undefined,
): Uint8Array {
  return taker.untake(symbols, map);
}
