import type { Candidate } from './candidate.ts';
import type { ParameterValues } from './parameters.ts';

/** Keys of candidates whose steps around the coder have no exported form. */
const UNEXPORTED_KEYS = ['after', 'stored', 'tables_in_set'] as const;

/** Highest order of `arith` that is exported: tables beyond it belong into no flash. */
const MOST_EXPORTED_ORDER = 2;

const whyNotRange = (range: unknown): string | undefined =>
  String(range) === '32' ? undefined : 'only range=32 is exported, which fits 32-bit integers';

/** For each coder that can be exported with shipped tables: why one with these parameters cannot, or undefined. */
const EXPORTED: ReadonlyMap<string, (values: ParameterValues) => string | undefined> = new Map([
  ['huffman', () => undefined],
  ['block-huffman', () => undefined],
  ['rice', () => undefined],
  ['golomb', () => undefined],
  ['exp-golomb', () => undefined],
  [
    'arith',
    ({ order, range }: ParameterValues) => {
      if (Number(order) > MOST_EXPORTED_ORDER)
        return `only orders up to ${MOST_EXPORTED_ORDER} are exported`;
      return whyNotRange(range);
    },
  ],
  ['fields', ({ range }: ParameterValues) => whyNotRange(range)],
]);

/** Names of the coders that have an exported form. */
export const exportableCoders: readonly string[] = [...EXPORTED.keys()];

/** Why a candidate has no exported form, in half a sentence; undefined where it has one. */
export function whyNotExported({ declaration, values }: Candidate): string | undefined {
  const own = EXPORTED.get(declaration.name);
  if (own === undefined) return `${declaration.name} has no exported form yet`;
  const key = UNEXPORTED_KEYS.find((k) => values[k] !== undefined);
  return key === undefined ? own(values) : `a candidate with ${key}= has no exported form yet`;
}
