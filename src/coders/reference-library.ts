import {
  type BrotliOptions,
  brotliCompressSync,
  brotliDecompressSync,
  constants,
  deflateRawSync,
  inflateRawSync,
  type ZlibOptions,
} from 'node:zlib';
import { CorruptStreamError, LimitError } from '../errors/errors.ts';

/** A general-purpose byte coder whose streams mark their own end. */
export interface ByteMethod {
  /** A whole stream; also for no bytes at all. */
  compress(bytes: Uint8Array): Uint8Array;
  /**
   * The stream that `bytes` begin with, and how many of them it takes; undefined when it holds more than `maxBytes` bytes.
   * @throws CorruptStreamError, LimitError (no memory)
   */
  decompress(bytes: Uint8Array, maxBytes: number): DecompressedStream | undefined;
}

export interface DecompressedStream {
  readonly content: Uint8Array;
  readonly usedBytes: number;
}

/** What Node's zlib gives back when asked for `info`; its type declarations leave this out. */
interface WithEngine {
  readonly buffer: Uint8Array;
  /** Bytes of the input taken, not counting what lies after the stream's end. */
  readonly engine: { readonly bytesWritten: number };
}

/** The largest output that Node's zlib can be held to, in bytes. */
const LARGEST_OUTPUT = 2 ** 32 - 1;

/** How Node's zlib says that it found no memory, in an error's code or message. */
const OUT_OF_MEMORY = /Z_MEM_ERROR|_ALLOC_|ERR_ZLIB_INITIALIZATION_FAILED|allocation failed/;

function bounded(
  name: string,
  maxBytes: number,
  call: (maxOutputLength: number) => unknown,
): DecompressedStream | undefined {
  // Node takes no bound below 1; a single byte too many shows in the length.
  const maxOutputLength = Math.min(LARGEST_OUTPUT, Math.max(1, maxBytes));
  try {
    const { buffer, engine } = call(maxOutputLength) as WithEngine;
    if (buffer.length > maxBytes) return undefined;
    return { content: buffer, usedBytes: engine.bytesWritten };
  } catch (error) {
    const { code, message } = error as NodeJS.ErrnoException;
    if (code === 'ERR_BUFFER_TOO_LARGE') return undefined;
    if (OUT_OF_MEMORY.test(`${code} ${message}`)) {
      throw new LimitError(`${name} found no memory for its output`, {
        expected: `room for at most ${maxBytes} bytes`,
        got: message,
      });
    }
    throw new CorruptStreamError(`the coded bytes are no whole ${name} stream`, {
      got: message,
      advice: 'The bytes were cut or altered, or belong to another coder or other tables.',
    });
  }
}

/**
 * Raw deflate streams (no zlib or gzip header, no checksum).
 * @param dictionary  bytes that both ends hold before the stream begins; the last are the nearest
 */
export function deflateMethod(options: ZlibOptions, dictionary?: Uint8Array): ByteMethod {
  const preset = dictionary === undefined || dictionary.length === 0 ? {} : { dictionary };
  const write: ZlibOptions = { ...options, ...preset };
  return {
    compress: (bytes) => deflateRawSync(bytes, write),
    decompress: (bytes, maxBytes) =>
      bounded('deflate', maxBytes, (maxOutputLength) =>
        inflateRawSync(bytes, { ...preset, maxOutputLength, info: true }),
      ),
  };
}

/** Brotli streams at quality 0 … 11, the window of the library's default. */
export function brotliMethod(quality: number): ByteMethod {
  const write: BrotliOptions = { params: { [constants.BROTLI_PARAM_QUALITY]: quality } };
  return {
    compress: (bytes) => brotliCompressSync(bytes, write),
    decompress: (bytes, maxBytes) =>
      bounded('brotli', maxBytes, (maxOutputLength) => {
        const read = { maxOutputLength, info: true };
        return brotliDecompressSync(bytes, read);
      }),
  };
}
