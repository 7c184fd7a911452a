import { checkWholeRecords, type RecordShape } from '../symbols/record.ts';
import type { ByteSegments } from '../symbols/segments.ts';
import { type MessageRule, PREFIXES, type PrefixType, refuseFrame } from './messages.ts';

/** Where messages lie in one chunk of a file; the last one may go on in the next chunk. */
export interface CutChunk {
  readonly segments: ByteSegments;
  /** The last segment is no whole message yet. */
  readonly isOpen: boolean;
}

/** Cuts one file, chunk after chunk, into the messages that `segmentFile` finds in the whole of it. */
export interface ChunkCutter {
  /**
   * The segments share memory with those of the call before.
   * @param bytes   at least one
   * @param isLast  the file ends with this chunk
   */
  cut(bytes: Uint8Array, isLast: boolean): CutChunk;
}

/** Rules whose messages can be found while a file is read. */
export type StreamedRule = Exclude<MessageRule, { kind: 'fill' }>;

/**
 * A cutter for one file. Under `every`, where symbols are counted, a file is one message here.
 * @throws InputError for a ragged record file, and while cutting for a frame that the file ends inside
 */
export function chunkCutter(
  rule: StreamedRule,
  byteCount: number,
  file: string,
  record?: RecordShape,
): ChunkCutter {
  switch (rule.kind) {
    case 'whole':
    case 'every':
      return new PeriodCutter(Number.POSITIVE_INFINITY);
    case 'records': {
      // That there is a record was checked with the plan.
      checkWholeRecords(byteCount, record!, file);
      return new PeriodCutter(record!.bytes * rule.count);
    }
    case 'lines':
      return new LineCutter();
    case 'prefix':
      return new FrameCutter(rule.type, file);
  }
}

/** Gathers segments of a chunk. */
class Segments {
  #starts = new Uint32Array(64);
  #ends = new Uint32Array(64);
  #count = 0;

  clear(): void {
    this.#count = 0;
  }

  add(start: number, end: number): void {
    if (this.#count === this.#starts.length) {
      this.#starts = doubled(this.#starts);
      this.#ends = doubled(this.#ends);
    }
    this.#starts[this.#count] = start;
    this.#ends[this.#count++] = end;
  }

  /** Shares memory until {@link clear}. */
  list(): ByteSegments {
    return {
      starts: this.#starts.subarray(0, this.#count),
      ends: this.#ends.subarray(0, this.#count),
    };
  }
}

function doubled(array: Uint32Array<ArrayBuffer>): Uint32Array<ArrayBuffer> {
  const grown = new Uint32Array(array.length * 2);
  grown.set(array);
  return grown;
}

/** Messages of a fixed number of bytes, the last one shorter. */
class PeriodCutter implements ChunkCutter {
  readonly #period: number;
  readonly #segments = new Segments();
  #left: number;

  constructor(period: number) {
    this.#period = period;
    this.#left = period;
  }

  cut(bytes: Uint8Array, isLast: boolean): CutChunk {
    this.#segments.clear();
    let at = 0;
    while (this.#left <= bytes.length - at) {
      this.#segments.add(at, at + this.#left);
      at += this.#left;
      this.#left = this.#period;
    }
    const isOpen = at < bytes.length;
    if (isOpen) this.#segments.add(at, bytes.length);
    this.#left -= bytes.length - at;
    return { segments: this.#segments.list(), isOpen: isOpen && !isLast };
  }
}

const NEWLINE = 0x0a;

/** Lines without their newlines; nothing after the last newline is no message. */
class LineCutter implements ChunkCutter {
  readonly #segments = new Segments();

  cut(bytes: Uint8Array, isLast: boolean): CutChunk {
    this.#segments.clear();
    let start = 0;
    for (let end = bytes.indexOf(NEWLINE); end >= 0; end = bytes.indexOf(NEWLINE, start)) {
      this.#segments.add(start, end);
      start = end + 1;
    }
    const hasTail = start < bytes.length;
    if (hasTail) this.#segments.add(start, bytes.length);
    return { segments: this.#segments.list(), isOpen: hasTail && !isLast };
  }
}

/** Frames after their length prefixes. */
class FrameCutter implements ChunkCutter {
  readonly #type: PrefixType;
  readonly #file: string;
  readonly #segments = new Segments();
  /** Bytes of prefix still to come, and what those before them say. */
  #prefixLeft: number;
  #prefix: number[] = [];
  #bodyLeft = 0;
  #frames = 0;
  #fileOffset = 0;

  constructor(type: PrefixType, file: string) {
    this.#type = type;
    this.#file = file;
    this.#prefixLeft = PREFIXES[type].bytes;
  }

  cut(bytes: Uint8Array, isLast: boolean): CutChunk {
    const { bytes: width, bigEndian } = PREFIXES[this.#type];
    this.#segments.clear();
    let at = 0;
    let isOpen = false;
    while (at < bytes.length) {
      if (this.#prefixLeft > 0) {
        this.#prefix.push(bytes[at++]);
        if (--this.#prefixLeft > 0) continue;
        if (!bigEndian) this.#prefix.reverse();
        this.#bodyLeft = this.#prefix.reduce((sum, byte) => sum * 256 + byte, 0);
        if (this.#bodyLeft > 0) continue;
      }
      const end = Math.min(bytes.length, at + this.#bodyLeft);
      this.#segments.add(at, end);
      this.#bodyLeft -= end - at;
      at = end;
      isOpen = this.#bodyLeft > 0;
      if (isOpen) break;
      this.#prefixLeft = width;
      this.#prefix = [];
      this.#frames++;
    }
    this.#fileOffset += bytes.length;
    if (isLast) this.#refuseCut(width);
    return { segments: this.#segments.list(), isOpen };
  }

  #refuseCut(width: number): void {
    const gotPrefix = this.#prefix.length;
    if (this.#bodyLeft > 0) {
      const length = this.#prefix.reduce((sum, byte) => sum * 256 + byte, 0);
      const got = length - this.#bodyLeft;
      const start = this.#fileOffset - got - width;
      refuseFrame(this.#file, start, this.#frames, length, got, 'frame');
    }
    if (gotPrefix > 0) {
      const start = this.#fileOffset - gotPrefix;
      refuseFrame(this.#file, start, this.#frames, width, gotPrefix, 'prefix');
    }
  }
}
