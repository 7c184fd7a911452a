import { BugError } from '../errors/errors.ts';
import { newSymbolArray } from '../symbols/sequence.ts';
import type { TakenValues } from '../symbols/takers/taker.ts';

/** Number of symbols. */
export function valueCount(values: TakenValues): number {
  switch (values.kind) {
    case 'symbols':
      return values.symbols.length;
    case 'code-points':
      return values.codePoints.length;
    case 'quantised':
      return values.integers.length;
    case 'texts':
      return values.ids.length;
  }
}

type OfKind<K extends TakenValues['kind']> = Extract<TakenValues, { kind: K }>;

function allOfKind<K extends TakenValues['kind']>(
  parts: readonly TakenValues[],
  kind: K,
): OfKind<K>[] {
  return parts.map((part) => {
    if (part.kind !== kind) throw new BugError(`one taker gave both ${kind} and ${part.kind}`);
    return part as OfKind<K>;
  });
}

function concatenate<T extends Uint8Array | Uint16Array | Uint32Array | Float64Array>(
  parts: readonly T[],
  whole: T,
): T {
  let at = 0;
  for (const part of parts) {
    whole.set(part, at);
    at += part.length;
  }
  return whole;
}

/**
 * The values of several files, one after another, as one. A single part is given back as it is, not copied.
 * @param parts  at least one, all from the same taker
 */
export function joinValues(parts: readonly TakenValues[]): TakenValues {
  const first = parts[0];
  if (parts.length === 1) return first;
  const total = parts.reduce((sum, part) => sum + valueCount(part), 0);
  switch (first.kind) {
    case 'symbols': {
      const symbols = newSymbolArray(first.alphabetSize, total);
      concatenate(
        allOfKind(parts, 'symbols').map((part) => part.symbols),
        symbols,
      );
      return { ...first, symbols };
    }
    case 'code-points': {
      const all = allOfKind(parts, 'code-points').map((part) => part.codePoints);
      return { kind: 'code-points', codePoints: concatenate(all, new Uint32Array(total)) };
    }
    case 'quantised': {
      const all = allOfKind(parts, 'quantised').map((part) => part.integers);
      return { kind: 'quantised', integers: concatenate(all, new Float64Array(total)) };
    }
    case 'texts':
      return joinTexts(allOfKind(parts, 'texts'), total);
  }
}

function joinTexts(parts: readonly OfKind<'texts'>[], total: number): TakenValues {
  const ids = new Uint32Array(total);
  const texts: string[] = [];
  const idOf = new Map<string, number>();
  let at = 0;
  for (const part of parts) {
    const renamed = part.texts.map((text) => {
      const known = idOf.get(text);
      if (known !== undefined) return known;
      idOf.set(text, texts.length);
      texts.push(text);
      return texts.length - 1;
    });
    for (const id of part.ids) ids[at++] = renamed[id];
  }
  return { kind: 'texts', ids, texts };
}
