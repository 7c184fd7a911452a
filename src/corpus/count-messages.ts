import { closeSync, openSync, readSync } from 'node:fs';
import { explainFileError } from '../errors/fs-faults.ts';
import type { CorpusSpec } from './corpus.ts';
import type { FoundFile } from './find-files.ts';
import { parseMessageRule } from './messages.ts';
import { chunkCutter } from './stream-cut.ts';

const CHUNK_BYTES = 2 ** 20;

/**
 * About how many messages, or units where they are filled, a file holds: read through where they can only be found so, else
 * by its size.
 * @throws InputError as intake does
 */
export function countMessages(
  { absolutePath, path }: FoundFile,
  byteCount: number,
  symbolsPerByte: number,
  spec: Pick<CorpusSpec, 'messages' | 'record'>,
): number {
  const rule = parseMessageRule(spec.messages);
  if (rule.kind === 'whole') return 1;
  if (rule.kind === 'every') return Math.ceil((byteCount * symbolsPerByte) / rule.count);
  if (rule.kind === 'records')
    return Math.ceil(byteCount / ((spec.record?.bytes ?? 1) * rule.count));
  if (rule.kind === 'fill' && typeof rule.unit === 'number')
    return Math.ceil(byteCount / rule.unit);
  const cut = rule.kind === 'fill' ? ({ kind: 'lines' } as const) : rule;
  const cutter = chunkCutter(cut, byteCount, path, spec.record);
  const buffer = new Uint8Array(Math.min(CHUNK_BYTES, byteCount));
  let descriptor: number | undefined;
  let count = 0;
  try {
    descriptor = openSync(absolutePath, 'r');
    for (let at = 0; at < byteCount; ) {
      const got = readSync(descriptor, buffer, 0, buffer.length, at);
      if (got === 0) break;
      at += got;
      const { segments, isOpen } = cutter.cut(buffer.subarray(0, got), at >= byteCount);
      count += segments.starts.length - (isOpen ? 1 : 0);
    }
  } catch (error) {
    throw explainFileError(error, path);
  } finally {
    if (descriptor !== undefined) closeSync(descriptor);
  }
  return count;
}
