import { InputError } from '../errors/errors.ts';
import { cFiles } from './c-files.ts';
import type { ExportSubject } from './export-subject.ts';
import type { ExportedCoder } from './exporter.ts';
import { exportedCoder } from './exporters.ts';
import { jsonFile } from './json-file.ts';
import { type Provenance, provenanceLines, provenanceOf } from './provenance.ts';
import { selftimeFile } from './selftime.ts';
import { tsFile } from './ts-file.ts';

export type ExportFormat = 'json' | 'c' | 'ts';

export interface Export {
  readonly coder: ExportedCoder;
  readonly provenance: Provenance;
  /** Text by file name. */
  readonly files: ReadonlyMap<string, string>;
}

/** Refuses what would not be a name in C and TypeScript. */
function checkExportName(name: string): void {
  if (/^[a-z][a-z0-9_]{0,40}$/.test(name)) return;
  throw new InputError(`${JSON.stringify(name)} cannot be the name of exported functions`, {
    expected: 'a letter, then letters, digits and underscores, in lower case, at most 41',
    advice: 'Give another with --name.',
  });
}

/** The files of an export; nothing is written. @throws InputError where the candidate has no exported form */
export function exportFiles(subject: ExportSubject, format: ExportFormat, name: string): Export {
  checkExportName(name);
  const { candidate, setup } = subject;
  const coder = exportedCoder(candidate, setup);
  const provenance = provenanceOf(coder, subject);
  const naming = { name, provenance: provenanceLines(provenance, coder) };
  const files = new Map<string, string>();
  if (format === 'c') {
    for (const [file, text] of cFiles(coder, setup, naming)) files.set(file, text);
    files.set('selftime.c', selftimeFile(name, candidate, setup, coder));
  } else if (format === 'ts') files.set(`${name}.ts`, tsFile(coder, setup, naming));
  // Tables and facts go with every format, so that a decoder in the field can be traced to its training data.
  files.set(`${name}.json`, jsonFile(coder, provenance));
  return { coder, provenance, files };
}
