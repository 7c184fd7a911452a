/**
 * The costly parts of a floor, each computed once: entropies by order, what adaptive coders reach, match lengths. Each is a
 * function of the coded symbols and of what its key says, plain data throughout, so that it can cross to another thread and be
 * kept in a cache.
 */
export class FloorPieces {
  readonly #byKey: Map<string, unknown>;

  constructor(known: ReadonlyMap<string, unknown> = new Map()) {
    this.#byKey = new Map(known);
  }

  /** The piece of that key, computed where it is not there. */
  take<T>(key: string, compute: () => T): T {
    if (!this.#byKey.has(key)) this.#byKey.set(key, compute());
    return this.#byKey.get(key) as T;
  }

  add(more: ReadonlyMap<string, unknown>): void {
    for (const [key, piece] of more) this.#byKey.set(key, piece);
  }

  get size(): number {
    return this.#byKey.size;
  }

  asMap(): Map<string, unknown> {
    return new Map(this.#byKey);
  }
}
