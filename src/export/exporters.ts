import type { Candidate } from '../coders/candidate.ts';
import type { Setup } from '../coders/contract.ts';
import { InputError } from '../errors/errors.ts';
import { exportArith } from './export-arith.ts';
import { exportBlockHuffman } from './export-block-huffman.ts';
import { exportHuffman } from './export-huffman.ts';
import { exportInteger } from './export-integer.ts';
import type { ExportedCoder, Exporter } from './exporter.ts';

/** Coders that can be exported, by name. */
const exporters: ReadonlyMap<string, Exporter> = new Map([
  ['huffman', exportHuffman],
  ['block-huffman', exportBlockHuffman],
  ['arith', exportArith],
  ['rice', exportInteger],
  ['golomb', exportInteger],
  ['exp-golomb', exportInteger],
]);

/** Keys of candidates whose steps around the coder have no exported form. */
const UNEXPORTED_KEYS = ['after', 'stored', 'tables_in_set'] as const;

/** Names of the coders that can be exported. */
export const exportableCoders: readonly string[] = [...exporters.keys()];

/** Why a candidate cannot be exported at all, in half a sentence; undefined where it can. */
export function whyNotExported(candidate: Candidate): string | undefined {
  const { name } = candidate.declaration;
  if (!exporters.has(name)) return `${name} has no exported form yet`;
  const key = UNEXPORTED_KEYS.find((k) => candidate.values[k] !== undefined);
  return key === undefined ? undefined : `a candidate with ${key}= has no exported form yet`;
}

/**
 * The programs and tables of a candidate.
 * @param setup  policy `shipped`, with tables trained on the train split, or `none`
 * @throws InputError where there is no exported form, saying what has one
 */
export function exportedCoder(candidate: Candidate, setup: Setup): ExportedCoder {
  const reason = whyNotExported(candidate);
  const exporter = exporters.get(candidate.declaration.name);
  if (reason !== undefined || exporter === undefined) {
    throw new InputError(`${candidate.id} cannot be exported: ${reason}`, {
      coder: candidate.declaration.name,
      expected: `one of ${exportableCoders.join(', ')}`,
    });
  }
  if (setup.align % 8 !== 0) {
    throw new InputError('an exported coder writes whole bytes', {
      key: 'align',
      expected: '8, 16, 32 or 64',
      got: String(setup.align),
    });
  }
  return exporter(candidate, setup);
}
