import { InputError } from '../errors/errors.ts';

/** A size as plans and options write it. */
export const BYTE_SIZE = /^\d+(\.\d+)? ?([kKMGT]i?)?B$/;

const POWERS: Readonly<Record<string, number>> = { k: 1, K: 1, M: 2, G: 3, T: 4 };

/**
 * Bytes of a size such as `512MB` (powers of 1000) or `64MiB` (powers of 1024), rounded down.
 * @throws InputError for anything else
 */
export function parseByteSize(text: string): number {
  const trimmed = text.trim();
  if (!BYTE_SIZE.test(trimmed)) {
    throw new InputError(`cannot read ${JSON.stringify(text)} as a size`, {
      expected: 'a size such as 512MB or 64MiB',
      got: text,
    });
  }
  const unit = /[kKMGT]i?(?=B$)/.exec(trimmed)?.[0] ?? '';
  const base = unit.endsWith('i') ? 1024 : 1000;
  return Math.floor(Number.parseFloat(trimmed) * base ** (POWERS[unit[0]] ?? 0));
}

/** As a plan would write it: the largest unit, in powers of 1000, of which there is a whole number. */
export function byteSizeText(bytes: number): string {
  const units = ['B', 'kB', 'MB', 'GB', 'TB'];
  let power = 0;
  let count = bytes;
  while (count > 0 && count % 1000 === 0 && power < units.length - 1) {
    count /= 1000;
    power++;
  }
  return `${count}${units[power]}`;
}

/** In whole megabytes, rounded up. */
export function megabytesText(bytes: number): string {
  return `${Math.ceil(bytes / 1e6)}MB`;
}
