import type { Candidate } from '../coders/candidate.ts';
import type { Setup } from '../coders/contract.ts';
import { exportableCoders, whyNotExported } from '../coders/exported.ts';
import { InputError } from '../errors/errors.ts';
import { exportArith } from './export-arith.ts';
import { exportBlockHuffman } from './export-block-huffman.ts';
import { exportFields } from './export-fields.ts';
import { exportHuffman } from './export-huffman.ts';
import { exportInteger } from './export-integer.ts';
import type { ExportedCoder, Exporter } from './exporter.ts';

/** Coders that can be exported, by name. */
const exporters: ReadonlyMap<string, Exporter> = new Map([
  ['huffman', exportHuffman],
  ['block-huffman', exportBlockHuffman],
  ['arith', exportArith],
  ['fields', exportFields],
  ['rice', exportInteger],
  ['golomb', exportInteger],
  ['exp-golomb', exportInteger],
]);

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
