import { closeSync, openSync, readSync } from 'node:fs';
import { InputError } from '../errors/errors.ts';
import { explainFileError } from '../errors/fs-faults.ts';
import type { SymbolTaker } from '../symbols/takers/taker.ts';
import type { CorpusSpec } from './corpus.ts';
import type { FoundFile } from './find-files.ts';
import { type MessageRule, PREFIXES, type PrefixType, refuseFrame } from './messages.ts';
import { inputFileBytes } from './read-file.ts';
import { chosenBlocks, type SampleFacts, type SampleRule } from './sample-rule.ts';

/** The messages of one block: what is taken in the place of a file. */
export interface SamplePiece {
  /** File and first byte, for messages about it. */
  readonly path: string;
  readonly bytes: Uint8Array;
}

export interface Sample {
  readonly pieces: readonly SamplePiece[];
  readonly facts: SampleFacts;
}

/** Bytes read at once while a message's end is looked for. */
const SCAN_BYTES = 2 ** 16;

/**
 * Reads the chosen blocks of files. A message belongs to the block in which it begins, and is read to its end, also where
 * that lies past the block's; a block in which none begins gives nothing. So a block is taken whole or not at all, no message
 * is cut, and none is taken twice. Where a file is one message, and where symbols have no fixed size (code points), the block
 * itself is cut at symbols.
 *
 * Length-prefixed frames can be found only from the beginning of their file, so that their prefixes are read up to the last
 * block; of all others nothing is read but the blocks and the search for their last message's end.
 * @throws InputError for files as intake does, for more bytes than `mostBytes`, and for frames that the file ends inside
 */
export async function readSample(
  found: readonly FoundFile[],
  spec: CorpusSpec,
  sample: SampleRule,
  { taker, rule }: { taker: SymbolTaker; rule: MessageRule },
  mostBytes: number,
): Promise<Sample> {
  const { blockBytes } = sample;
  const sizes: number[] = [];
  for (const file of found) sizes.push(await inputFileBytes(file.absolutePath, file.path));
  const blockCounts = sizes.map((size) => Math.ceil(size / blockBytes));
  const ofBlocks = blockCounts.reduce((a, b) => a + b, 0);
  const chosen = chosenBlocks(sample, ofBlocks);
  if (chosen.length * blockBytes > mostBytes) {
    throw new InputError(`the sample of the corpus ${spec.name} is too large to hold in memory`, {
      key: 'sample',
      expected: `at most ${mostBytes} bytes`,
      got: `${chosen.length} blocks of ${blockBytes} bytes`,
      advice: 'Take fewer blocks.',
    });
  }
  const pieces: SamplePiece[] = [];
  let bytes = 0;
  let firstBlock = 0;
  let next = 0;
  found.forEach((file, i) => {
    const own: number[] = [];
    for (; next < chosen.length && chosen[next] < firstBlock + blockCounts[i]; next++)
      own.push(chosen[next] - firstBlock);
    firstBlock += blockCounts[i];
    if (own.length === 0) return;
    const reader = new PieceReader(file, sizes[i]);
    try {
      const startAfter = messageStarts(reader, spec, taker, rule);
      for (const block of own) {
        const from = startAfter(block * blockBytes);
        const to = startAfter((block + 1) * blockBytes);
        if (from >= to) continue;
        pieces.push({ path: `${file.path} from byte ${from}`, bytes: reader.read(from, to) });
        bytes += to - from;
      }
    } finally {
      reader.close();
    }
  });
  const ofBytes = sizes.reduce((a, b) => a + b, 0);
  return { pieces, facts: { rule: sample, blocks: chosen.length, ofBlocks, bytes, ofBytes } };
}

class PieceReader {
  readonly path: string;
  readonly size: number;
  readonly #descriptor: number;

  constructor({ absolutePath, path }: FoundFile, size: number) {
    this.path = path;
    this.size = size;
    try {
      this.#descriptor = openSync(absolutePath, 'r');
    } catch (error) {
      throw explainFileError(error, path);
    }
  }

  read(from: number, to: number): Uint8Array {
    const bytes = new Uint8Array(Math.max(0, Math.min(this.size, to) - from));
    try {
      for (let filled = 0; filled < bytes.length; ) {
        const got = readSync(this.#descriptor, bytes, filled, bytes.length - filled, from + filled);
        if (got === 0) throw new InputError(`${this.path} became shorter while it was read`);
        filled += got;
      }
    } catch (error) {
      throw explainFileError(error, this.path);
    }
    return bytes;
  }

  close(): void {
    closeSync(this.#descriptor);
  }
}

/** The first byte from a position on at which a message begins; the file's size where none does. Asked for rising positions. */
type StartAfter = (position: number) => number;

function messageStarts(
  reader: PieceReader,
  { record }: CorpusSpec,
  taker: SymbolTaker,
  rule: MessageRule,
): StartAfter {
  const within = (starts: StartAfter): StartAfter => {
    return (position) => (position >= reader.size ? reader.size : starts(position));
  };
  if (rule.kind === 'lines') return within((position) => lineStart(reader, position));
  if (rule.kind === 'prefix') return frameStarts(reader, rule.type);
  if (taker.alphabet !== 'natural') return within((position) => codePointStart(reader, position));
  const symbolBytes = taker.field === undefined ? 1 / taker.maxSymbolsPerByte : record!.bytes;
  const messageBytes =
    rule.kind === 'every'
      ? rule.count * symbolBytes
      : rule.kind === 'records'
        ? rule.count * record!.bytes
        : symbolBytes;
  // Bits and nibbles: the fewest messages that are whole bytes.
  let period = messageBytes;
  while (!Number.isInteger(period)) period *= 2;
  return within((position) => Math.min(reader.size, Math.ceil(position / period) * period));
}

const NEWLINE = 0x0a;

function lineStart(reader: PieceReader, position: number): number {
  if (position === 0) return 0;
  for (let at = position - 1; at < reader.size; at += SCAN_BYTES) {
    const found = reader.read(at, at + SCAN_BYTES).indexOf(NEWLINE);
    if (found >= 0) return at + found + 1;
  }
  return reader.size;
}

/** The first byte that does not go on with a code point of UTF-8. */
function codePointStart(reader: PieceReader, position: number): number {
  const bytes = reader.read(position, position + 4);
  let at = 0;
  while (at < 3 && at < bytes.length && (bytes[at] & 0xc0) === 0x80) at++;
  return position + at;
}

/** Walks the frames of a file from its beginning on. */
function frameStarts(reader: PieceReader, type: PrefixType): StartAfter {
  const { bytes: width, bigEndian } = PREFIXES[type];
  let buffer = new Uint8Array(0);
  let bufferAt = 0;
  let frame = 0;
  let index = 0;
  return (position) => {
    while (frame < Math.min(position, reader.size)) {
      if (frame + width > bufferAt + buffer.length || frame < bufferAt) {
        buffer = reader.read(frame, frame + SCAN_BYTES) as Uint8Array<ArrayBuffer>;
        bufferAt = frame;
        if (buffer.length < width)
          refuseFrame(reader.path, frame, index, width, buffer.length, 'prefix');
      }
      let length = 0;
      for (let i = 0; i < width; i++) {
        const place = bigEndian ? i : width - 1 - i;
        length = length * 256 + buffer[frame - bufferAt + place];
      }
      const end = frame + width + length;
      if (end > reader.size) {
        const left = reader.size - frame - width;
        refuseFrame(reader.path, frame, index, length, left, 'frame');
      }
      frame = end;
      index++;
    }
    return frame;
  };
}
