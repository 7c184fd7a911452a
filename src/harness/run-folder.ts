import { createHash } from 'node:crypto';
import { readFile } from 'node:fs/promises';
import { join } from 'node:path';
import { InputError } from '../errors/errors.ts';
import { explainFileError } from '../errors/fs-faults.ts';
import type { MessagePairs, RunResult } from './run-all.ts';
import { type RunRecord, runRecordSchema } from './run-record.ts';
import { writeWhole } from './write-whole.ts';

/** File of a cell's message figures below `messages/`: readable where it can be, and never two alike. */
export function messageFileName(cellId: string): string {
  const hash = createHash('sha256').update(cellId).digest('hex').slice(0, 8);
  return `${cellId.replace(/[^A-Za-z0-9@=.-]+/g, '_')}.${hash}.f64`;
}

/** Carried bits and symbol count of each message, as pairs of little-endian doubles. */
function packPairs(pairs: MessagePairs): Uint8Array {
  const bytes = new Uint8Array(pairs.bits.length * 16);
  const view = new DataView(bytes.buffer);
  for (let i = 0; i < pairs.bits.length; i++) {
    view.setFloat64(i * 16, pairs.bits[i], true);
    view.setFloat64(i * 16 + 8, pairs.symbols[i], true);
  }
  return bytes;
}

/** Writes `run.json` and `messages/` into a folder, each file whole or not at all; the record comes last. */
export async function writeRunFolder(folder: string, result: RunResult): Promise<void> {
  for (const [id, pairs] of result.messages) {
    await writeWhole(join(folder, 'messages', messageFileName(id)), packPairs(pairs));
  }
  await writeWhole(join(folder, 'run.json'), `${JSON.stringify(result.record, null, 1)}\n`);
}

/** Reads a run folder's record (or a record file) and checks it against the schema. */
export async function readRunRecord(path: string): Promise<RunRecord> {
  const file = path.endsWith('.json') ? path : join(path, 'run.json');
  let text: string;
  try {
    text = await readFile(file, 'utf8');
  } catch (error) {
    throw explainFileError(error, file);
  }
  let json: unknown;
  try {
    json = JSON.parse(text);
  } catch (error) {
    throw new InputError('this is no run record: it is not JSON', {
      file,
      got: (error as Error).message,
    });
  }
  const parsed = runRecordSchema.safeParse(json);
  if (parsed.success) return parsed.data;
  const issue = parsed.error.issues[0];
  throw new InputError('this is no run record that this version reads', {
    file,
    key: issue.path.join('.'),
    got: issue.message,
  });
}
