/** What kernels that fill messages know of them. */
export interface MessageRoom {
  /** Bits for a message with its count, a multiple of `align`. */
  readonly budgetBits: number;
  /** 1, 2, 4, or a multiple of 8. */
  readonly align: number;
  /** Symbols that a count counts by; 0: no counts. */
  readonly unitSymbols: number;
}

/** Bits of a message's count as Elias delta word (Elias 1975), as bits/elias-delta.ts writes it; below 2^31 − 1. */
export function countWidth(symbolCount: number, unitSymbols: number): number {
  if (unitSymbols === 0) return 0;
  const number = numberOf(symbolCount, unitSymbols);
  const length = 32 - Math.clz32(number);
  return 2 * (31 - Math.clz32(length)) + length;
}

/** The word itself, right-justified; below 2^16 − 1, so that it takes at most 24 bits. */
export function countWord(symbolCount: number, unitSymbols: number): number {
  const number = numberOf(symbolCount, unitSymbols);
  const length = 32 - Math.clz32(number);
  return (length << (length - 1)) | (number ^ (1 << (length - 1)));
}

function numberOf(symbolCount: number, unitSymbols: number): number {
  return (unitSymbols === 1 ? symbolCount : symbolCount / unitSymbols) + 1;
}
