import { type PrefixLookup, SYMBOL_SPAN } from './prefix-lookup.ts';

/** Symbols of a message; longer ones gain nothing here. */
export const MOST_SYMBOLS = 4096;
/** More padding than this is not looked at in one load. */
const MOST_ALIGN_BITS = 32;
/** Bytes that a message takes or that are loaded with it, its words left out: count, padding, loads past them. */
const SLACK_BYTES = 24;
/** Symbols that may be stored past a message: two, and the store that covers them. */
export const SPARE_SYMBOLS = 8;

/** Messages of words, each behind its count where that is not granted, and padded to `align`. */
export interface WordMessages {
  readonly bytes: Uint8Array;
  readonly align: number;
  /** Symbols that a count counts by. */
  readonly unitSymbols: number;
  /** Granted symbol counts. */
  readonly symbolCounts: Uint32Array | undefined;
  /** Granted ends of the messages, in bits. */
  readonly messageEndsBits: Float64Array | undefined;
  readonly maxSymbols: number;
  /** Takes the end of each message, in symbols; as many entries as there are messages. */
  readonly symbolEnds: Uint32Array;
}

/**
 * Decodes many short messages of a byte alphabet at once, with all state in locals from message to
 * message. It takes a message only when all about it is right and the bytes reach well past it; it
 * stops in front of any other, which the plain path then decodes, or refuses with its reason.
 *
 * A look-up gives up to three symbols, so the last one of a message may give some of the next: they
 * are taken back by their lengths.
 */
export class PrefixMessageDecoder {
  /** Next message. */
  index = 0;
  /** Its first bit. */
  positionBits = 0;
  /** Symbols of the messages before it. */
  filled = 0;
  /** Whether the last run stopped because `out` had no room for one more message. */
  needsRoom = false;
  readonly #messages: WordMessages;
  readonly #lookup: PrefixLookup;
  readonly #view: DataView;

  constructor(messages: WordMessages, lookup: PrefixLookup) {
    const { buffer, byteOffset, byteLength } = messages.bytes;
    this.#messages = messages;
    this.#lookup = lookup;
    this.#view = new DataView(buffer, byteOffset, byteLength);
  }

  /** Whether such messages can be decoded here at all. */
  static takes({ bytes, align }: WordMessages, lookup: PrefixLookup): boolean {
    return (
      lookup.byteAlphabet &&
      lookup.lone < 0 &&
      align <= MOST_ALIGN_BITS &&
      bytes.length < 2 ** 31 &&
      bytes.length > SLACK_BYTES
    );
  }

  /**
   * Decodes messages from {@link index} on into `out` and moves on behind them.
   * @param out  needs room for {@link SPARE_SYMBOLS} more than what is decoded
   */
  run(out: Uint8Array): void {
    const { align, unitSymbols, symbolCounts, messageEndsBits, maxSymbols, symbolEnds } =
      this.#messages;
    const lookup = this.#lookup;
    const { triples, byteLengths, longest } = lookup;
    const shift = 32 - lookup.tableBits;
    const view = this.#view;
    const lastStart = view.byteLength - SLACK_BYTES;
    const outView = new DataView(out.buffer, out.byteOffset, out.byteLength);
    const lastTo = out.length - SPARE_SYMBOLS;
    const alignBytes = align >>> 3;
    const messageCount = symbolEnds.length;

    // The next message begins at bit `bit` of byte `at`; both are moved on before it is accepted.
    let index = this.index;
    let from = this.filled;
    let bit = this.positionBits & 7;
    let at = ((this.positionBits - bit) / 8) >>> 0;
    // The count before: messages of one size need not take theirs apart.
    let lastBits = 1;
    let lastWord = -1;
    let lastCount = 0;
    let startAt = at;
    let startBit = bit;
    this.needsRoom = false;
    for (; index < messageCount; index++) {
      startAt = at;
      startBit = bit;
      if (at > lastStart) break;
      let count: number;
      if (symbolCounts === undefined) {
        // Elias delta of count + 1, where its word has at most 3 leading zeros.
        const ahead = view.getInt32(at) << bit;
        if (ahead >>> (32 - lastBits) !== lastWord) {
          const zeros = Math.clz32(ahead);
          if (zeros > 3) break;
          const length = ahead >>> (31 - 2 * zeros);
          lastBits = 2 * zeros + length;
          lastWord = ahead >>> (32 - lastBits);
          const top = 1 << (length - 1);
          lastCount = ((top | (lastWord & (top - 1))) - 1) * unitSymbols;
        }
        count = lastCount;
        bit += lastBits;
        at += bit >>> 3;
        bit &= 7;
      } else {
        count = symbolCounts[index];
      }
      const to = from + count;
      if (count > MOST_SYMBOLS || to > maxSymbols || at + ((count * longest) >>> 3) > lastStart)
        break;
      if (to > lastTo) {
        this.needsRoom = true;
        break;
      }

      let filled = from;
      let known = true;
      while (filled < to) {
        const window = view.getInt32(at) << bit;
        let entry = triples[window >>> shift];
        if (entry === 0) {
          const found = lookup.find(window | (view.getUint8(at + 4) >>> (8 - bit)));
          if (found < 0) {
            known = false;
            break;
          }
          out[filled++] = found % SYMBOL_SPAN;
          bit += Math.floor(found / SYMBOL_SPAN);
        } else {
          outView.setInt32(filled, entry, true);
          filled += entry >>> 28;
          const used = (entry >>> 24) & 15;
          bit += used;
          if (filled < to) {
            entry = triples[(window << used) >>> shift];
            if (entry !== 0) {
              outView.setInt32(filled, entry, true);
              filled += entry >>> 28;
              bit += (entry >>> 24) & 15;
            }
          }
        }
        at += bit >>> 3;
        bit &= 7;
      }
      if (!known) break;
      // Masks are −1 where a symbol was one too many.
      bit -=
        (byteLengths[out[to]] & ((to - filled) >> 31)) +
        (byteLengths[out[to + 1]] & ((to + 1 - filled) >> 31));
      at += bit >> 3;
      bit &= 7;

      const over = align <= 8 ? bit : (at % alignBytes) * 8 + bit;
      const padding = align <= 8 ? -bit & (align - 1) : over === 0 ? 0 : align - over;
      if (((view.getInt32(at) << bit) >>> 1) >>> (31 - padding) !== 0) break;
      bit += padding;
      at += bit >>> 3;
      bit &= 7;
      if (messageEndsBits !== undefined && messageEndsBits[index] !== at * 8 + bit) break;
      symbolEnds[index] = to;
      from = to;
    }
    if (index === messageCount) {
      startAt = at;
      startBit = bit;
    }
    this.index = index;
    this.filled = from;
    this.positionBits = startAt * 8 + startBit;
  }
}
