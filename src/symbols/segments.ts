/**
 * Where the messages of one file lie in its bytes: message i is `bytes[starts[i] … ends[i] − 1]`.
 *
 * Invariants: starts[i] ≤ ends[i] ≤ starts[i + 1]; what lies between two segments (a newline, a length prefix) is no part
 * of any symbol.
 */
export interface ByteSegments {
  readonly starts: Uint32Array;
  readonly ends: Uint32Array;
}

/** The whole of `byteCount` bytes as one segment. */
export function oneSegment(byteCount: number): ByteSegments {
  return { starts: Uint32Array.of(0), ends: Uint32Array.of(byteCount) };
}

/** Bytes that lie in segments. */
export function segmentBytes(segments: ByteSegments): number {
  let total = 0;
  for (let i = 0; i < segments.starts.length; i++) total += segments.ends[i] - segments.starts[i];
  return total;
}
