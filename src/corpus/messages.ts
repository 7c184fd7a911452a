import { InputError } from '../errors/errors.ts';
import { nearestWord } from '../errors/nearest.ts';
import { checkWholeRecords, type RecordShape } from '../symbols/record.ts';
import { type ByteSegments, oneSegment } from '../symbols/segments.ts';

/** Types of a length prefix: width in bytes and byte order. */
export const PREFIXES = {
  u8: { bytes: 1, bigEndian: true },
  u16le: { bytes: 2, bigEndian: false },
  u16be: { bytes: 2, bigEndian: true },
  u32le: { bytes: 4, bigEndian: false },
  u32be: { bytes: 4, bigEndian: true },
} as const;

export type PrefixType = keyof typeof PREFIXES;

/**
 * How a file is cut into messages.
 * - `whole`: one message a file.
 * - `lines`: up to each newline, which is no symbol; nothing after the last newline is no message.
 * - `every`: `count` symbols, the last message of a file shorter.
 * - `records`: `count` records, the last message of a file shorter.
 * - `prefix`: frames, each after its length in bytes, which is no symbol.
 * - `fill`: as many whole units as fit into so many coded bytes, so each candidate cuts its own; what a file is cut into
 *   here are the units: so many source bytes, a line with its newline, which is a symbol, since it parts the lines again, or
 *   a row of a table, of which a column gives one symbol.
 */
export type MessageRule =
  | { readonly kind: 'whole' }
  | { readonly kind: 'lines' }
  | { readonly kind: 'every'; readonly count: number }
  | { readonly kind: 'records'; readonly count: number }
  | { readonly kind: 'prefix'; readonly type: PrefixType }
  | { readonly kind: 'fill'; readonly bytes: number; readonly unit: number | 'line' | 'row' };

/** What the decoder gets for free: symbol counts, where messages end, or neither. */
export type LengthsGranted = 'known' | 'link' | 'sent';

const FORMS =
  'whole, lines, every=N, records=K, prefix=u8|u16le|u16be|u32le|u32be or fill=BYTES,unit=N|line|row';

const LARGEST_COUNT = 2 ** 31;

/**
 * Reads a rule as a plan or an option writes it.
 * @throws InputError with the nearest word
 */
export function parseMessageRule(text: string): MessageRule {
  const trimmed = text.trim();
  const equals = trimmed.indexOf('=');
  const word = (equals < 0 ? trimmed : trimmed.slice(0, equals)).trim();
  const value = equals < 0 ? undefined : trimmed.slice(equals + 1).trim();
  if (word === 'fill') return parseFill(trimmed);
  if ((word === 'whole' || word === 'lines') && value === undefined) return { kind: word };
  if (word === 'every' || word === 'records') {
    const count = /^\d{1,10}$/.test(value ?? '') ? Number(value) : 0;
    if (count >= 1 && count <= LARGEST_COUNT) return { kind: word, count };
    refuseRule(trimmed, `${word}= and a whole number from 1 to ${LARGEST_COUNT}`, undefined);
  }
  if (word === 'prefix') {
    if (value !== undefined && Object.hasOwn(PREFIXES, value))
      return { kind: 'prefix', type: value as PrefixType };
    const types = Object.keys(PREFIXES);
    refuseRule(trimmed, `prefix= and one of ${types.join(', ')}`, nearestWord(value ?? '', types));
  }
  const near = nearestWord(word, ['whole', 'lines', 'every', 'records', 'prefix', 'fill']);
  return refuseRule(trimmed, FORMS, near);
}

function parseFill(text: string): MessageRule {
  const match = /^fill=\s*(\d{1,10})\s*,\s*unit=\s*(\d{1,10}|line|row)$/.exec(text);
  const expected = `fill=BYTES,unit=N, unit=line or unit=row, with whole numbers from 1 to ${LARGEST_COUNT}`;
  if (match === null) refuseRule(text, expected, undefined);
  const bytes = Number(match[1]);
  const unit = match[2];
  const size = unit === 'line' || unit === 'row' ? 1 : Number(unit);
  if (bytes < 1 || bytes > LARGEST_COUNT || size < 1 || size > LARGEST_COUNT)
    refuseRule(text, expected, undefined);
  return { kind: 'fill', bytes, unit: unit === 'line' || unit === 'row' ? unit : size };
}

function refuseRule(got: string, expected: string, near: string | undefined): never {
  throw new InputError(`messages cannot be cut by ${JSON.stringify(got)}`, {
    expected,
    got,
    ...(near === undefined ? {} : { advice: `Did you mean ${near}?` }),
  });
}

/** The budget of {@link MessageRule} `fill` as coders take it. */
export interface FillBudget {
  /** Most coded bytes of a message. */
  readonly bytes: number;
  /** Symbols of every unit, where units have a fixed size. */
  readonly unitSymbols?: number;
}

/** The lengths rule where the plan says nothing: links carry packets and records whole, files and lines are joined. */
export function usualLengths(rule: MessageRule): LengthsGranted {
  return rule.kind === 'whole' || rule.kind === 'lines' ? 'sent' : 'link';
}

/**
 * The byte ranges of a file's messages. Under `every` and for rows, where symbols are counted, this is the whole file: see
 * {@link everyEnds}.
 * @param record  needed under `records`
 * @throws InputError for a ragged record file (size, record, remainder) or a frame that the file ends inside (offset)
 */
export function segmentFile(
  rule: MessageRule,
  bytes: Uint8Array,
  file: string,
  record?: RecordShape,
): ByteSegments {
  switch (rule.kind) {
    case 'whole':
    case 'every':
      return oneSegment(bytes.length);
    case 'lines':
      return lineSegments(bytes);
    case 'records':
      return recordSegments(bytes.length, rule.count, file, record);
    case 'prefix':
      return frameSegments(bytes, rule.type, file);
    case 'fill':
      if (rule.unit === 'row') return oneSegment(bytes.length);
      return rule.unit === 'line'
        ? wholeLineSegments(bytes)
        : unitSegments(bytes.length, rule.unit, file);
  }
}

/** Lines with their newlines. */
function wholeLineSegments(bytes: Uint8Array): ByteSegments {
  const { starts, ends } = lineSegments(bytes);
  for (let i = 0; i < ends.length; i++) if (ends[i] < bytes.length) ends[i]++;
  return { starts, ends };
}

function unitSegments(byteCount: number, unitBytes: number, file: string): ByteSegments {
  const over = byteCount % unitBytes;
  if (over !== 0) {
    throw new InputError(`${file} is not a whole number of units`, {
      file,
      byteOffset: byteCount - over,
      expected: `a multiple of ${unitBytes} bytes, the size of one unit`,
      got: `${byteCount} bytes: ${(byteCount - over) / unitBytes} units and ${over} ${over === 1 ? 'byte' : 'bytes'} more`,
      advice: 'Check unit=, or cut the header or the broken last unit off the file.',
    });
  }
  const starts = new Uint32Array(byteCount / unitBytes);
  const ends = new Uint32Array(starts.length);
  for (let i = 0; i < starts.length; i++) {
    starts[i] = i * unitBytes;
    ends[i] = (i + 1) * unitBytes;
  }
  return { starts, ends };
}

const NEWLINE = 0x0a;

function lineSegments(bytes: Uint8Array): ByteSegments {
  let count = 0;
  for (let i = 0; i < bytes.length; i++) if (bytes[i] === NEWLINE) count++;
  const open = bytes.length > 0 && bytes[bytes.length - 1] !== NEWLINE;
  const starts = new Uint32Array(open ? count + 1 : count);
  const ends = new Uint32Array(starts.length);
  let start = 0;
  for (let line = 0; line < count; line++) {
    const end = bytes.indexOf(NEWLINE, start);
    starts[line] = start;
    ends[line] = end;
    start = end + 1;
  }
  if (open) {
    starts[count] = start;
    ends[count] = bytes.length;
  }
  return { starts, ends };
}

function recordSegments(
  byteCount: number,
  recordsPerMessage: number,
  file: string,
  record: RecordShape | undefined,
): ByteSegments {
  if (record === undefined) {
    throw new InputError('messages of records need to know the record', {
      file,
      expected: 'record: {bytes: N} beside messages',
      got: 'no record',
    });
  }
  checkWholeRecords(byteCount, record, file);
  const size = record.bytes * recordsPerMessage;
  const starts = new Uint32Array(Math.ceil(byteCount / size));
  const ends = new Uint32Array(starts.length);
  for (let i = 0; i < starts.length; i++) {
    starts[i] = i * size;
    ends[i] = Math.min(byteCount, (i + 1) * size);
  }
  return { starts, ends };
}

function frameSegments(bytes: Uint8Array, type: PrefixType, file: string): ByteSegments {
  const { bytes: width, bigEndian } = PREFIXES[type];
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  /** Walks all frames; the first walk counts, the second fills the arrays in. */
  const walk = (into?: { starts: Uint32Array; ends: Uint32Array }): number => {
    let count = 0;
    let at = 0;
    while (at < bytes.length) {
      const start = at + width;
      if (start > bytes.length) refuseFrame(file, at, count, width, bytes.length - at, 'prefix');
      const length =
        width === 1
          ? bytes[at]
          : width === 2
            ? view.getUint16(at, !bigEndian)
            : view.getUint32(at, !bigEndian);
      if (start + length > bytes.length)
        refuseFrame(file, at, count, length, bytes.length - start, 'frame');
      if (into !== undefined) {
        into.starts[count] = start;
        into.ends[count] = start + length;
      }
      count++;
      at = start + length;
    }
    return count;
  };
  const count = walk();
  const segments = { starts: new Uint32Array(count), ends: new Uint32Array(count) };
  walk(segments);
  return segments;
}

export function refuseFrame(
  file: string,
  byteOffset: number,
  messageIndex: number,
  expectedBytes: number,
  gotBytes: number,
  part: 'prefix' | 'frame',
): never {
  throw new InputError(`${file} ends inside a length-prefixed ${part}`, {
    file,
    byteOffset,
    messageIndex,
    expected: `${expectedBytes} more bytes`,
    got: `${gotBytes}`,
    advice: 'Check the type and the byte order of the prefix, or cut the broken last frame off.',
  });
}

/** Ends of messages of `count` symbols in a file of `symbolCount`; the last one is shorter. */
export function everyEnds(symbolCount: number, count: number): Uint32Array {
  const ends = new Uint32Array(Math.ceil(symbolCount / count));
  for (let i = 0; i < ends.length; i++) ends[i] = Math.min(symbolCount, (i + 1) * count);
  return ends;
}
