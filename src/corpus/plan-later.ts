import type { PlanDocument } from './plan-document.ts';
import { type Fault, gotText, keyText } from './plan-faults.ts';

/**
 * What the plan file has a place for and this version does not do. A plan that uses it is refused: to ignore it would be
 * to answer another question than the one asked. Symbol and message words of later versions are refused by their own
 * parsers.
 *
 * In a path `*` stands for any name or index. Without `when`, the key itself is not built; with it, only such values.
 */
interface Later {
  readonly path: string;
  readonly when?: (value: unknown) => boolean;
  readonly meanwhile?: string;
}

const LATER: readonly Later[] = [
  { path: 'coders' },
  { path: 'check', when: (value) => value === 'crc32', meanwhile: 'Write check: none.' },
];

/** Every place of `data` that a path of the table leads to. */
function placesOf(
  data: unknown,
  path: readonly string[],
): { path: PropertyKey[]; value: unknown }[] {
  let places: { path: PropertyKey[]; value: unknown }[] = [{ path: [], value: data }];
  for (const key of path) {
    places = places.flatMap(({ path: before, value }) => {
      if (typeof value !== 'object' || value === null) return [];
      const entries: [PropertyKey, unknown][] = Array.isArray(value)
        ? [...value.entries()]
        : Object.entries(value);
      return entries
        .filter(([name]) => key === '*' || name === key)
        .map(([name, inner]) => ({ path: [...before, name], value: inner }));
    });
  }
  return places;
}

/** A fault for each use of what is not built yet. */
export function laterFaults(document: PlanDocument): Fault[] {
  return LATER.flatMap(({ path, when, meanwhile }) =>
    placesOf(document.data, path.split('.'))
      .filter(({ value }) => when === undefined || when(value))
      .map(
        (place): Fault => ({
          line: document.lineOf(place.path),
          key: keyText(place.path),
          problem: when === undefined ? 'not yet built' : `not yet built: ${gotText(place.value)}`,
          ...(meanwhile === undefined ? {} : { advice: meanwhile }),
          notYet: true,
        }),
      ),
  );
}
