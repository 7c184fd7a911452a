import { ACCOUNT_LINES, type BitAccount, LINE_LETTERS } from '../account/bit-account.ts';

/** Lines that are spelled, in the order in which letters follow one another. */
export const SPELLED_LINES = ACCOUNT_LINES.filter((line) => line !== 'floor');

/** A letter's worth, in bits per symbol. */
const PIECES = [0.001, 0.002, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1, 2, 5, 10];

/**
 * The smallest round piece with which the better candidates' gaps fit into `width` letters: it holds three times the lower
 * quartile of the gaps, or the widest gap if that is less. A gap that does not fit is cut, so that poor candidates do not
 * flatten the ones to choose from.
 * @param gaps  Σ of the lines of each row, without sign, in bits per symbol
 */
export function pieceFor(gaps: readonly number[], width: number): number {
  const sorted = [...gaps].sort((a, b) => a - b);
  const quartile = sorted[Math.floor((sorted.length - 1) / 4)] ?? 0;
  const shown = Math.min(quartile * 3, sorted[sorted.length - 1] ?? 0);
  return PIECES.find((piece) => shown / piece <= width) ?? PIECES[PIECES.length - 1];
}

/** Ends a row that does not fit. */
export const CUT = '…';

/** Σ of the positive lines of an account, and of the negative ones without their sign, in bits per symbol. */
export function gapExtent(
  account: BitAccount,
  symbolCount: number,
): { above: number; below: number } {
  let above = 0;
  let below = 0;
  for (const line of SPELLED_LINES) {
    const value = (account[line] ?? 0) / symbolCount;
    if (value > 0) above += value;
    else below -= value;
  }
  return { above, below };
}

function letters(account: BitAccount, symbolCount: number, piece: number, sign: 1 | -1): string {
  let text = '';
  let total = 0;
  for (const line of SPELLED_LINES) {
    const value = (sign * (account[line] ?? 0)) / symbolCount;
    if (value <= 0) continue;
    total += value;
    // Rounding the running total, not each line, keeps the length of the whole right.
    text += LINE_LETTERS[line].repeat(Math.max(0, Math.round(total / piece) - text.length));
  }
  return text;
}

/**
 * The gap over the floor, spelled: each letter stands for `piece` bits per symbol and names the account line it went to.
 * Lines below zero come first, in parentheses: bits by which the cell lies below what the others add up to.
 * @param width  most characters; a longer text is cut and ends in {@link CUT}
 */
export function spellGap(
  account: BitAccount,
  symbolCount: number,
  piece: number,
  width = Number.POSITIVE_INFINITY,
): string {
  if (symbolCount === 0) return '';
  const below = letters(account, symbolCount, piece, -1);
  const text = (below === '' ? '' : `(${below}) `) + letters(account, symbolCount, piece, 1);
  return text.length <= width ? text : text.slice(0, width - 1) + CUT;
}
