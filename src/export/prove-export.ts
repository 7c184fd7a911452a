import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { adversarialMessages } from './adversarial.ts';
import { cFiles } from './c-files.ts';
import type { ExportSubject } from './export-subject.ts';
import type { ExportedCoder } from './exporter.ts';
import { type MeasuredEnd, measureC } from './measure-c.ts';
import { expectation, type Proof, prove } from './prove.ts';
import { buildC } from './run-c.ts';
import { loadModule } from './run-ts.ts';
import { tsFile } from './ts-file.ts';

/** Messages that no training data look like, and damaged ones, in each proof. */
const ADVERSARIAL_MESSAGES = 10_000;
const DAMAGED_MESSAGES = 10_000;

/** A proof and what was proven. */
export interface NamedProof extends Proof {
  readonly what: string;
  /** Of C built for size, where the compiler tells. */
  readonly sizes?: { readonly encoder: MeasuredEnd; readonly decoder: MeasuredEnd };
}

function sizesOf(folder: string, name: string, compiler: string): Pick<NamedProof, 'sizes'> {
  const encoder = measureC(folder, `${name}_encode.c`, compiler);
  const decoder = measureC(folder, `${name}_decode.c`, compiler);
  return encoder === undefined || decoder === undefined ? {} : { sizes: { encoder, decoder } };
}

/**
 * Builds an export in a temporary folder and holds it to the program's own coder on train, test, adversarial and damaged
 * messages.
 * @param languages  `c` needs a compiler; it is built twice, the second time with sanitizers
 * @throws ParityError at the first difference
 */
export async function proveExport(
  subject: ExportSubject,
  coder: ExportedCoder,
  languages: readonly ('c' | 'ts')[],
  compiler = 'gcc',
): Promise<NamedProof[]> {
  const { candidate, setup, train, test } = subject;
  const { alphabetSize, unitSymbols = 1 } = setup;
  const adversarial = adversarialMessages(alphabetSize, unitSymbols, ADVERSARIAL_MESSAGES, 1);
  const sequences = test === undefined ? [train, adversarial] : [train, test, adversarial];
  const expected = expectation(candidate, setup, sequences, DAMAGED_MESSAGES);
  const naming = { name: 'proof', provenance: ['Made for a proof.'] };
  const folder = mkdtempSync(join(tmpdir(), 'bitassay-proof-'));
  const proofs: NamedProof[] = [];
  try {
    if (languages.includes('c')) {
      const files = cFiles(coder, setup, naming);
      for (const sanitize of [false, true]) {
        const run = buildC(files, naming.name, setup, folder, { sanitize, compiler });
        const what = sanitize ? `C99, ${compiler} with sanitizers` : `C99, ${compiler} -Os`;
        const sizes = sanitize ? {} : sizesOf(folder, naming.name, compiler);
        const proof = prove(expected, run);
        proofs.push({ what, ...proof, ...sizes });
      }
    }
    if (languages.includes('ts')) {
      const file = join(folder, 'proof.mjs');
      writeFileSync(file, tsFile(coder, setup, naming, false));
      const run = await loadModule(file);
      proofs.push({
        what: 'TypeScript, its types taken off',
        ...prove(expected, run),
      });
    }
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
  return proofs;
}
