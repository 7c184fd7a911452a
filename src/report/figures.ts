/** How figures are written, the same on every screen. */

/** Decimals that tell rates apart where the least of them is this large. */
export function decimalsFor(leastRate: number): number {
  return leastRate < 1 ? 3 : 2;
}

/** A rate in bits per symbol. */
export function rateText(bitsPerSymbol: number, decimals = decimalsFor(bitsPerSymbol)): string {
  return bitsPerSymbol.toFixed(decimals);
}

/** With its sign always, for differences. */
export function signedRateText(bitsPerSymbol: number, decimals = 2): string {
  const text = rateText(Math.abs(bitsPerSymbol), decimals);
  return `${bitsPerSymbol < 0 && Number(text) !== 0 ? '−' : '+'}${text}`;
}

/** A speed and its interval. */
export interface SpeedFigures {
  readonly speed: number;
  readonly low: number;
  readonly high: number;
}

/** A size: bytes below 10 000, else KiB, MiB or GiB with one decimal. */
export function sizeText(bytes: number): string {
  if (bytes < 10_000) return `${Math.round(bytes)} B`;
  if (bytes < 10_000 * 1024) return `${(bytes / 1024).toFixed(1)} KiB`;
  if (bytes < 10_000 * 1024 ** 2) return `${(bytes / 1024 ** 2).toFixed(1)} MiB`;
  return `${(bytes / 1024 ** 3).toFixed(1)} GiB`;
}

/** A speed against the pacer: two significant digits, or one where its interval reaches further than a quarter of it. */
export function speedText({ speed, low, high }: SpeedFigures): string {
  if (high - low > speed / 2) return `×${Number(speed.toPrecision(1))}`;
  if (speed >= 9.95) return `×${Math.round(speed)}`;
  if (speed >= 0.995) return `×${speed.toFixed(1)}`;
  if (speed >= 0.0995) return `×${speed.toFixed(2)}`;
  return `×${speed.toFixed(3)}`;
}

/** A count with thin groups of three digits. */
export function countText(count: number): string {
  return String(Math.round(count)).replace(/\B(?=(\d{3})+$)/g, ' ');
}

/** A duration in words short enough for a line. */
export function durationText(seconds: number): string {
  if (seconds < 1) return 'under 1 s';
  if (seconds < 90) return `${Math.round(seconds)} s`;
  if (seconds < 5400) return `${Math.round(seconds / 60)} min`;
  return `${(seconds / 3600).toFixed(1)} h`;
}

/** The name of one symbol in the unit of a rate: bits per byte, bit, nibble …; `symbol` for all others. */
export function symbolNoun(symbolsAs: string): string {
  switch (symbolsAs) {
    case 'bytes':
      return 'byte';
    case 'nibbles':
      return 'nibble';
    case 'codepoints':
      return 'code point';
    default:
      return 'symbol';
  }
}

/** `text` padded with blanks on the right to `width`, by characters. */
export function padRight(text: string, width: number): string {
  return text + ' '.repeat(Math.max(0, width - [...text].length));
}

/** `text` padded with blanks on the left to `width`, by characters. */
export function padLeft(text: string, width: number): string {
  return ' '.repeat(Math.max(0, width - [...text].length)) + text;
}

/** Breaks a paragraph into lines of at most `width` characters, each after `indent`. */
export function wrapText(text: string, width: number, indent = ''): string[] {
  const lines: string[] = [];
  let line = '';
  for (const word of text.split(' ')) {
    if (line !== '' && [...indent, ...line, ...word].length + 1 > width) {
      lines.push(indent + line);
      line = word;
    } else {
      line = line === '' ? word : `${line} ${word}`;
    }
  }
  if (line !== '') lines.push(indent + line);
  return lines;
}
