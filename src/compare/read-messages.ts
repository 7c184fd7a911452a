import { readFile } from 'node:fs/promises';
import { dirname, join } from 'node:path';
import { InputError } from '../errors/errors.ts';
import { explainFileError } from '../errors/fs-faults.ts';
import type { MessagePairs } from '../harness/run-all.ts';
import { messageFileName, readRunRecord } from '../harness/run-folder.ts';
import type { CellRecord, RunRecord } from '../harness/run-record.ts';

/** A run as it lies in its folder: the record, and the figures of each message that comparisons need. */
export interface LoadedRun {
  readonly record: RunRecord;
  /** By cell id, verified cells only; of each unit where messages are filled. */
  readonly messages: ReadonlyMap<string, MessagePairs>;
}

/** Carried bits and symbols of one message, as doubles. */
const PAIR_BYTES = 16;

function unpackPairs(bytes: Uint8Array, file: string, cell: CellRecord): MessagePairs {
  const expected = cell.unit_count ?? cell.message_count!;
  if (bytes.length !== expected * PAIR_BYTES) {
    throw new InputError('the figures of this cell’s messages do not belong to the record', {
      file,
      expected: `${expected * PAIR_BYTES} bytes for ${expected} ${cell.unit_count === undefined ? 'messages' : 'units'} of ${cell.id}`,
      got: `${bytes.length} bytes`,
      advice: 'Run the plan again.',
    });
  }
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const bits = new Float64Array(expected);
  const symbols = new Float64Array(expected);
  for (let i = 0; i < expected; i++) {
    bits[i] = view.getFloat64(i * PAIR_BYTES, true);
    symbols[i] = view.getFloat64(i * PAIR_BYTES + 8, true);
    if (bits[i] >= 0 && bits[i] < Number.POSITIVE_INFINITY && Number.isSafeInteger(symbols[i]))
      continue;
    throw new InputError('these are no figures of messages', {
      file,
      expected: `carried bits and symbols of message ${i}`,
      got: `${bits[i]} and ${symbols[i]}`,
      advice: 'Run the plan again.',
    });
  }
  return { bits, symbols };
}

/**
 * The figures of each message of every verified cell of a record.
 * @param folder  the run's own, where `messages/` lies
 * @throws InputError for a file that is missing, or that does not fit the record
 */
export async function readMessages(
  folder: string,
  record: RunRecord,
): Promise<Map<string, MessagePairs>> {
  const messages = new Map<string, MessagePairs>();
  for (const cell of record.cells) {
    if (!cell.verified) continue;
    const file = join(folder, 'messages', messageFileName(cell.id));
    let bytes: Uint8Array;
    try {
      bytes = await readFile(file);
    } catch (error) {
      throw explainFileError(error, file);
    }
    messages.set(cell.id, unpackPairs(bytes, file, cell));
  }
  return messages;
}

/**
 * Reads a run folder, or the `run.json` in it, for {@link compareRun}.
 * @throws InputError for what is no run record of this version, and as {@link readMessages}
 */
export async function loadRun(path: string): Promise<LoadedRun> {
  const record = await readRunRecord(path);
  const folder = path.endsWith('.json') ? dirname(path) : path;
  return { record, messages: await readMessages(folder, record) };
}
