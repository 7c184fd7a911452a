import { InputError } from '../errors/errors.ts';
import type { RecordLayout } from '../symbols/record-layout.ts';
import { MessagePieces } from './message-pieces.ts';

/** Number of records in a message of so many bytes. Throws InputError for a part of one. */
export function recordCountOf(symbolCount: number, layout: RecordLayout): number {
  const over = symbolCount % layout.bytes;
  if (over === 0) return symbolCount / layout.bytes;
  throw new InputError('fields: a message is not a whole number of records', {
    coder: 'fields',
    key: 'messages',
    expected: `a multiple of ${layout.bytes} bytes, the size of one record`,
    got: `${symbolCount} bytes`,
    advice: 'Cut messages by records, as in messages: records=8.',
  });
}

/** The train split, gathered from chunks. */
export class TrainRecords {
  readonly pieces: MessagePieces;
  readonly #layout: RecordLayout;
  #bytes = new Uint8Array(1 << 12);
  #filled = 0;
  /** First record of each message. */
  readonly #firstRecords: number[] = [];

  constructor(layout: RecordLayout) {
    this.#layout = layout;
    this.pieces = new MessagePieces({
      begin: (symbolCount) => {
        recordCountOf(symbolCount, layout);
        this.#firstRecords.push(this.#filled / layout.bytes);
      },
      take: (symbols, from, to) => {
        const end = this.#filled + to - from;
        if (end > this.#bytes.length) {
          const grown = new Uint8Array(Math.max(end, 2 * this.#bytes.length));
          grown.set(this.#bytes);
          this.#bytes = grown;
        }
        this.#bytes.set(symbols.subarray(from, to), this.#filled);
        this.#filled = end;
      },
      end: () => {},
    });
  }

  get bytes(): Uint8Array {
    return this.#bytes.subarray(0, this.#filled);
  }

  /** Messages; under `fill`, units. */
  get unitCount(): number {
    return this.#firstRecords.length;
  }

  /** For each record 1 where contexts begin: at the first message, and then at each of so many. */
  starts(every: number): Uint8Array {
    const count = this.#filled / this.#layout.bytes;
    const starts = new Uint8Array(count);
    this.#firstRecords.forEach((record, message) => {
      if (record < count && (message === 0 || message % every === 0)) starts[record] = 1;
    });
    if (count > 0) starts[0] = 1;
    return starts;
  }
}
