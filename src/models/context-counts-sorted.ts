import type { SymbolArray } from '../symbols/sequence.ts';
import type { CountingBlocks } from './context-counts-blocks.ts';
import type { CountedOrder } from './context-counts-dense.ts';
import { copyOfRanks, type RankedSymbols } from './context-counts-ranks.ts';
import { log2OfCount, TallyBuilder } from './context-counts-tallies.ts';

/**
 * All windows of a sequence in rising order, a window being the next `width` symbols from a position on. Equal contexts of
 * every order below `width` then lie side by side, and so do equal pairs: a run of windows that agree in k symbols is a
 * context of order k, one that agrees in k + 1 symbols is a pair.
 */
export interface SortedWindows {
  /** `shared[j]`: symbols in which window j agrees with window j − 1, at most `width`. */
  readonly shared: Uint8Array;
  /** `room[j]`: symbols of window j that lie before its message's end, at most `width`. */
  readonly room: Uint8Array;
  /** `block[j]`: the block in which window j begins. */
  readonly block: Uint8Array;
}

/** One pass of the sort: by `digits[position + offset]`. */
interface DigitPass {
  readonly digits: Uint16Array;
  readonly offset: number;
}

/** Windows that agree in their lead are compared one with another while they are at most this share of all. */
const LARGEST_TIED_SHARE = 1 / 32;

/**
 * Sorts the windows by least-significant-digit radix over 16-bit digits, each digit holding as many symbols as fit.
 *
 * Where hardly two windows should agree in their first `lead` symbols, those digits alone are sorted by, and the windows that
 * agree after all are compared; if they turn out to be many, all digits are.
 * Symbols run on over message ends here; {@link SortedWindows.room} says what counts.
 * @param width  symbols of a window, 1 … 255
 * @param lead   1 … width; does not change the result
 * Memory: 11 to 17 bytes a symbol, see context-counts-memory.ts.
 */
export function sortWindows(
  ranked: RankedSymbols,
  ends: Uint32Array,
  width: number,
  blocks: CountingBlocks,
  lead: number = width,
): SortedWindows {
  const count = ranked.symbols.length;
  const ranks = copyOfRanks(ranked, width);
  const { passes, perSymbol } = digitPasses(ranks, ranked.distinct, width);
  const leadPasses = Math.ceil(lead * perSymbol);
  const leadSymbols = Math.round(leadPasses / perSymbol);
  let [positions, spare] = sortPositions(count, passes.slice(-leadPasses));
  if (leadPasses < passes.length && !settleTies(ranks, positions, leadSymbols, width)) {
    [positions, spare] = sortPositions(count, passes);
  }
  const roomAt = roomByPosition(ends, width, count);
  // The sort's second array is done with: its bytes hold what is read from now on.
  const shared = new Uint8Array(spare.buffer, 0, count);
  const room = new Uint8Array(spare.buffer, count, count);
  const block = new Uint8Array(spare.buffer, 2 * count, count);
  const blockAt = new Uint8Array(spare.buffer, 3 * count, count);
  let from = 0;
  blocks.ends.forEach((end, b) => {
    blockAt.fill(b, from, end);
    from = end;
  });
  shareWithPrevious(ranks, positions, width, shared);
  for (let j = 0; j < count; j++) {
    const position = positions[j];
    room[j] = roomAt[position];
    block[j] = blockAt[position];
  }
  return { shared, room, block };
}

/** The passes, least significant first, and how many of them a symbol takes. */
function digitPasses(
  ranks: SymbolArray,
  distinct: number,
  width: number,
): { readonly passes: DigitPass[]; readonly perSymbol: number } {
  const passes: DigitPass[] = [];
  if (distinct > 0x10000) {
    const low = new Uint16Array(ranks.length);
    const high = new Uint16Array(ranks.length);
    for (let i = 0; i < ranks.length; i++) {
      low[i] = ranks[i] & 0xffff;
      high[i] = ranks[i] >>> 16;
    }
    for (let offset = width - 1; offset >= 0; offset--) {
      passes.push({ digits: low, offset }, { digits: high, offset });
    }
    return { passes, perSymbol: 2 };
  }
  let symbolsInDigit = 1;
  while (symbolsInDigit < width && distinct ** (symbolsInDigit + 1) <= 0x10000) symbolsInDigit++;
  const digits = new Uint16Array(ranks.length);
  const oldest = distinct ** (symbolsInDigit - 1);
  let digit = 0;
  for (let i = ranks.length - 1; i >= 0; i--) {
    digit = Math.floor(digit / distinct) + ranks[i] * oldest;
    digits[i] = digit;
  }
  const digitCount = Math.ceil(width / symbolsInDigit);
  // The last digit starts early enough to end with the window; symbols sorted by twice do no harm.
  for (let d = digitCount - 1; d >= 0; d--) {
    passes.push({ digits, offset: Math.min(d * symbolsInDigit, width - symbolsInDigit) });
  }
  return { passes, perSymbol: 1 / symbolsInDigit };
}

/**
 * Sorts windows that agree in their first `lead` symbols by the others.
 * @returns false where they are too many, and nothing is settled
 */
function settleTies(
  ranks: SymbolArray,
  positions: Uint32Array,
  lead: number,
  width: number,
): boolean {
  const runs: number[] = [];
  const most = positions.length * LARGEST_TIED_SHARE;
  let tied = 0;
  let start = 0;
  for (let j = 1; j <= positions.length; j++) {
    if (j < positions.length) {
      const a = positions[j - 1];
      const b = positions[j];
      let agree = 0;
      while (agree < lead && ranks[a + agree] === ranks[b + agree]) agree++;
      if (agree === lead) continue;
    }
    if (j - start > 1) {
      tied += j - start;
      if (tied > most) return false;
      runs.push(start, j);
    }
    start = j;
  }
  const compare = (a: number, b: number): number => {
    let at = lead;
    while (at < width && ranks[a + at] === ranks[b + at]) at++;
    return at === width ? 0 : ranks[a + at] - ranks[b + at];
  };
  for (let r = 0; r < runs.length; r += 2) positions.subarray(runs[r], runs[r + 1]).sort(compare);
  return true;
}

function sortPositions(count: number, passes: readonly DigitPass[]): [Uint32Array, Uint32Array] {
  let from = new Uint32Array(count);
  let to = new Uint32Array(count);
  for (let i = 0; i < count; i++) from[i] = i;
  const starts = new Uint32Array(0x10000);
  for (const { digits, offset } of passes) {
    starts.fill(0);
    for (let i = offset; i < count + offset; i++) starts[digits[i]]++;
    let start = 0;
    for (let d = 0; d < starts.length; d++) {
      const size = starts[d];
      starts[d] = start;
      start += size;
    }
    for (let i = 0; i < count; i++) {
      const position = from[i];
      to[starts[digits[position + offset]]++] = position;
    }
    [from, to] = [to, from];
  }
  return [from, to];
}

function roomByPosition(ends: Uint32Array, width: number, count: number): Uint8Array {
  const room = new Uint8Array(count).fill(width);
  let from = 0;
  for (let m = 0; m < ends.length; m++) {
    const to = ends[m];
    for (let i = Math.max(from, to - width); i < to; i++) room[i] = to - i;
    from = to;
  }
  return room;
}

function shareWithPrevious(
  ranks: SymbolArray,
  positions: Uint32Array,
  width: number,
  shared: Uint8Array,
): void {
  if (positions.length > 0) shared[0] = 0;
  for (let j = 1; j < positions.length; j++) {
    const a = positions[j - 1];
    const b = positions[j];
    let agree = 0;
    while (agree < width && ranks[a + agree] === ranks[b + agree]) agree++;
    shared[j] = agree;
  }
}

/** Contexts and pairs of one order below the windows' width. Cost: one pass over the windows. */
export function countSorted(
  windows: SortedWindows,
  order: number,
  blocks: CountingBlocks,
): CountedOrder {
  const { shared, room } = windows;
  const contexts = new TallyBuilder();
  const pairs = new TallyBuilder();
  const blockBits = new Float64Array(blocks.count);
  let contextStart = 0;
  let contextCount = 0;
  let pairStart = 0;
  let pairCount = 0;
  // Windows too short for this order are passed over: what agrees across them is the least of what agrees on the way.
  let agree = 0xff;
  for (let j = 0; j <= shared.length; j++) {
    if (j === shared.length) agree = -1;
    else {
      if (shared[j] < agree) agree = shared[j];
      if (room[j] <= order) continue;
    }
    if (agree <= order) {
      if (pairCount > 0) {
        pairs.add(pairCount);
        addBits(blockBits, windows, pairStart, j, order, -log2OfCount(pairCount));
      }
      pairStart = j;
      pairCount = 0;
      if (agree < order) {
        if (contextCount > 0) {
          contexts.add(contextCount);
          addBits(blockBits, windows, contextStart, j, order, log2OfCount(contextCount));
        }
        contextStart = j;
        contextCount = 0;
      }
    }
    pairCount++;
    contextCount++;
    agree = 0xff;
  }
  return { contextTallies: contexts.finish(), pairTallies: pairs.finish(), blockBits };
}

function addBits(
  blockBits: Float64Array,
  { room, block }: SortedWindows,
  from: number,
  to: number,
  order: number,
  bits: number,
): void {
  if (bits === 0) return;
  for (let j = from; j < to; j++) if (room[j] > order) blockBits[block[j]] += bits;
}
