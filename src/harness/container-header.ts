import { BitReader } from '../bits/bit-reader.ts';
import { BitWriter } from '../bits/bit-writer.ts';
import { crc32 } from '../bits/crc32.ts';
import { readCount, writeCount } from '../bits/elias-delta.ts';
import type { TablePolicy } from '../coders/contract.ts';
import { CorruptStreamError, InputError } from '../errors/errors.ts';
import { type AlphabetMap, readAlphabetMap, writeAlphabetMap } from '../symbols/alphabet-map.ts';

/** What a container says about its coded bytes. */
export interface ContainerHeader {
  /** As `parseCandidate` reads it. */
  readonly candidate: string;
  readonly policy: TablePolicy;
  /** As `parseSymbolTaker` reads it. */
  readonly symbolsAs: string;
  /** What the symbols stand for, where the taker has no alphabet of its own. */
  readonly map?: AlphabetMap;
  readonly contentBytes: number;
  readonly contentCrc32: number;
  readonly codedBytes: number;
  readonly codedCrc32: number;
}

const MAGIC = [0x42, 0x41, 0x53, 0x59];
const VERSION = 1;
/** Magic, version, and the header's length. */
const OPENING_BYTES = 9;
const CRC_BYTES = 4;
const POLICIES: readonly TablePolicy[] = ['none', 'sent', 'learned', 'shipped', 'primed'];
/** No candidate or symbol taker is written longer than this, in bytes. */
const LONGEST_TEXT = 4096;

function refuseAltered(problem: string, byteOffset: number): never {
  throw new CorruptStreamError(`the container’s header ${problem}`, {
    byteOffset,
    advice: 'The file was altered after it was written; take an unharmed copy.',
  });
}

export function refuseCut(expected: number, got: number): never {
  throw new CorruptStreamError('the container was cut: its end is missing', {
    byteOffset: got,
    expected: `${expected} bytes or more`,
    got: `${got} bytes`,
    advice: 'Copy the file again, whole.',
  });
}

/** The text stands on whole bytes, so that a look at the file shows it. */
function writeText(writer: BitWriter, text: string): void {
  const bytes = new TextEncoder().encode(text);
  if (bytes.length > LONGEST_TEXT) {
    throw new InputError(`a container has no room for ${JSON.stringify(`${text.slice(0, 40)}…`)}`, {
      expected: `at most ${LONGEST_TEXT} bytes`,
      got: `${bytes.length} bytes`,
    });
  }
  writeCount(writer, bytes.length);
  writer.padTo(8);
  writer.writeBytes(bytes);
}

function readPadding(reader: BitReader): void {
  const over = reader.position % 8;
  if (over > 0 && reader.readBits(8 - over) !== 0) {
    refuseAltered('has bits where there should be none', Math.floor(reader.position / 8));
  }
}

function readText(reader: BitReader): string {
  const byteCount = readCount(reader);
  readPadding(reader);
  const from = reader.position / 8;
  if (byteCount > LONGEST_TEXT || byteCount * 8 > reader.limit - reader.position) {
    refuseAltered('holds a text that is too long', from);
  }
  const bytes = reader.bytes.subarray(from, from + byteCount);
  reader.seek(reader.position + byteCount * 8);
  try {
    return new TextDecoder('utf-8', { fatal: true, ignoreBOM: true }).decode(bytes);
  } catch {
    return refuseAltered('holds a text that is not UTF-8', from);
  }
}

/**
 * The header as it stands at the start of a container, version 1:
 *
 * | bytes | what |
 * |---|---|
 * | 4 | `BASY` |
 * | 1 | version, 1 |
 * | 4 | length of the next part, little endian |
 * | … | candidate and symbol taker, each an Elias delta count, zeros up to a whole byte, and UTF-8; the table policy in 3 bits; 1 bit that tells whether an alphabet map follows, and the map; byte count and CRC-32 of the content, then of the coded bytes; zeros up to a whole byte |
 * | 4 | CRC-32 of all before, little endian |
 *
 * The coded bytes follow, to the end of the file.
 */
export function writeContainerHeader(header: ContainerHeader): Uint8Array {
  const writer = new BitWriter();
  writeText(writer, header.candidate);
  writeText(writer, header.symbolsAs);
  writer.writeBits(POLICIES.indexOf(header.policy), 3);
  writer.writeBits(header.map === undefined ? 0 : 1, 1);
  if (header.map !== undefined) writeAlphabetMap(writer, header.map);
  writeCount(writer, header.contentBytes);
  writer.writeBits(header.contentCrc32, 32);
  writeCount(writer, header.codedBytes);
  writer.writeBits(header.codedCrc32, 32);
  const fields = writer.finish().bytes;

  const bytes = new Uint8Array(OPENING_BYTES + fields.length + CRC_BYTES);
  const view = new DataView(bytes.buffer);
  bytes.set(MAGIC);
  bytes[4] = VERSION;
  view.setUint32(5, fields.length, true);
  bytes.set(fields, OPENING_BYTES);
  const end = OPENING_BYTES + fields.length;
  view.setUint32(end, crc32(bytes.subarray(0, end)), true);
  return bytes;
}

/**
 * Reads and checks the header that `bytes` begin with; nothing is allocated for what it claims.
 * @returns the header, and the index of the first coded byte
 * @throws InputError when this is no container or one of another version; CorruptStreamError when it was cut or altered
 */
export function readContainerHeader(bytes: Uint8Array): {
  header: ContainerHeader;
  codedFrom: number;
} {
  if (MAGIC.some((byte, i) => i < bytes.length && bytes[i] !== byte) || bytes.length === 0) {
    throw new InputError('this is no file of bitassay encode', {
      byteOffset: 0,
      expected: 'a file that begins with BASY',
      got: bytes.length === 0 ? 'an empty file' : 'other bytes',
      advice: 'bitassay decode reads only what bitassay encode wrote.',
    });
  }
  if (bytes.length > MAGIC.length && bytes[4] !== VERSION) {
    throw new InputError('this container is of a version that this program does not read', {
      byteOffset: 4,
      expected: `version ${VERSION}`,
      got: `version ${bytes[4]}`,
      advice: 'Decode it with the bitassay that wrote it, or a newer one.',
    });
  }
  if (bytes.length < OPENING_BYTES + CRC_BYTES) {
    refuseCut(OPENING_BYTES + CRC_BYTES, bytes.length);
  }
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const end = OPENING_BYTES + view.getUint32(5, true);
  if (bytes.length < end + CRC_BYTES) refuseCut(end + CRC_BYTES, bytes.length);
  if (view.getUint32(end, true) !== crc32(bytes.subarray(0, end))) {
    refuseAltered('does not match its checksum', 0);
  }
  return { header: readFields(bytes.subarray(0, end)), codedFrom: end + CRC_BYTES };
}

function readFields(bytes: Uint8Array): ContainerHeader {
  const reader = new BitReader(bytes);
  reader.seek(OPENING_BYTES * 8);
  const candidate = readText(reader);
  const symbolsAs = readText(reader);
  const policy = POLICIES[reader.readBits(3)];
  if (policy === undefined) refuseAltered('names no table policy', Math.floor(reader.position / 8));
  const map = reader.readBits(1) === 1 ? readAlphabetMap(reader) : undefined;
  const contentBytes = readCount(reader);
  const contentCrc32 = reader.readBits(32);
  const codedBytes = readCount(reader);
  const codedCrc32 = reader.readBits(32);
  readPadding(reader);
  if (reader.position !== bytes.length * 8) {
    refuseAltered('holds more than its fields', reader.position / 8);
  }
  return {
    candidate,
    policy,
    symbolsAs,
    ...(map === undefined ? {} : { map }),
    contentBytes,
    contentCrc32,
    codedBytes,
    codedCrc32,
  };
}
