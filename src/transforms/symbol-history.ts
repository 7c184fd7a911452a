/** The last symbols of a message, as many as a step looks back: a ring whose next slot holds the oldest. */
export class SymbolHistory {
  readonly ring: Uint32Array;
  /** Slot of the symbol `ring.length` back, which the present one replaces. */
  slot = 0;
  /** Symbols since the start, up to `ring.length`; slots beyond hold nothing of this message. */
  seen = 0;

  constructor(lag: number) {
    this.ring = new Uint32Array(lag);
  }

  restart(): void {
    this.slot = 0;
    this.seen = 0;
  }
}
