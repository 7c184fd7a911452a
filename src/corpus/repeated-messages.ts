import type { SymbolArray, SymbolSequence } from '../symbols/sequence.ts';

/** A 32-bit hash of symbols and their number: a multiply and a fold for each symbol, mixed once more at the end. */
function hashOf(symbols: SymbolArray, start: number, end: number): number {
  let hash = (end - start) | 0;
  for (let i = start; i < end; i++) {
    hash = Math.imul(hash ^ symbols[i], 0x9e3779b1);
    hash ^= hash >>> 15;
  }
  hash = Math.imul(hash ^ (hash >>> 16), 0x85ebca6b);
  return (hash ^ (hash >>> 13)) >>> 0;
}

function equalRange(
  a: SymbolArray,
  startA: number,
  endA: number,
  b: SymbolArray,
  startB: number,
  endB: number,
): boolean {
  if (endA - startA !== endB - startB) return false;
  for (let i = startA, j = startB; i < endA; i++, j++) if (a[i] !== b[j]) return false;
  return true;
}

/**
 * For each message of `test` 1 when the same symbols are also a message of `train`, else 0. Exact: equal hashes are
 * compared symbol by symbol.
 *
 * Cost: one pass over both, and 12 bytes for each train message, rounded up to a power of two.
 */
export function repeatedMessages(train: SymbolSequence, test: SymbolSequence): Uint8Array {
  const ends = train.messageEnds;
  const slots = 2 ** Math.ceil(Math.log2(ends.length * 2 + 2));
  /** Index of a distinct train message plus 1; 0 is a free slot. */
  const table = new Uint32Array(slots);
  const hashes = new Uint32Array(ends.length);

  /** The slot of an equal train message, or the free slot where it would stand. */
  const find = (symbols: SymbolArray, start: number, end: number, hash: number): number => {
    let slot = hash % slots;
    for (;;) {
      const held = table[slot];
      if (held === 0) return slot;
      if (hashes[held - 1] === hash) {
        const heldStart = held === 1 ? 0 : ends[held - 2];
        if (equalRange(symbols, start, end, train.symbols, heldStart, ends[held - 1])) return slot;
      }
      slot = (slot + 1) % slots;
    }
  };

  let start = 0;
  for (let i = 0; i < ends.length; i++) {
    const hash = hashOf(train.symbols, start, ends[i]);
    hashes[i] = hash;
    const slot = find(train.symbols, start, ends[i], hash);
    if (table[slot] === 0) table[slot] = i + 1;
    start = ends[i];
  }
  const repeated = new Uint8Array(test.messageEnds.length);
  start = 0;
  for (let i = 0; i < repeated.length; i++) {
    const end = test.messageEnds[i];
    const slot = find(test.symbols, start, end, hashOf(test.symbols, start, end));
    if (table[slot] !== 0) repeated[i] = 1;
    start = end;
  }
  return repeated;
}
