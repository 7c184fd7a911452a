const QUOTE = 0x22;
const LINE_FEED = 0x0a;
const CARRIAGE_RETURN = 0x0d;

/**
 * Cuts a table of comma-separated values into pieces of whole rows, each of `leastBytes` or a little more, so that a
 * large table is never held as cells all at once.
 *
 * A line end is the end of a row exactly when an even number of quotes stands before it: a quote inside a quoted cell is
 * doubled (RFC 4180, section 2, rule 7). In a table that breaks this rule the cuts may fall elsewhere, and the parser
 * refuses the stray quote in the piece that holds it.
 */
export function* csvWindows(bytes: Uint8Array, leastBytes: number): Generator<Uint8Array> {
  let start = 0;
  let quoted = false;
  for (let i = 0; i < bytes.length; i++) {
    const byte = bytes[i];
    if (byte === QUOTE) quoted = !quoted;
    else if (byte !== LINE_FEED && byte !== CARRIAGE_RETURN) continue;
    else if (quoted || i + 1 - start < leastBytes) continue;
    // The two bytes of one line end stay together.
    else if (byte === LINE_FEED || bytes[i + 1] !== LINE_FEED) {
      yield bytes.subarray(start, i + 1);
      start = i + 1;
    }
  }
  if (start < bytes.length) yield bytes.subarray(start);
}
