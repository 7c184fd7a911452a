/**
 * A second order-k back-off model, as plain as can be: maps from context strings to counts, and the definition of method C
 * with exclusion and update exclusion written down step by step. Far too slow for anything but a test.
 */
export class PlainBackOff {
  readonly alphabetSize: number;
  readonly order: number;
  readonly halveAt: number;
  contexts = new Map<string, Map<number, number>>();
  history: number[] = [];
  readonly positions: number;
  position = 0;

  constructor(alphabetSize: number, order: number, halveAt: number, positions = 1) {
    this.positions = positions;
    this.alphabetSize = alphabetSize;
    this.order = order;
    this.halveAt = halveAt;
    this.start();
  }

  start(): void {
    this.history = new Array(this.order).fill(this.alphabetSize);
    this.position = 0;
  }

  /** The intervals of the next symbol as `frequency/total`; then counts it. */
  code(symbol: number): string[] {
    const ratios: string[] = [];
    const excluded = new Set<number>();
    let codedAt = -1;
    for (let length = this.order; length >= 0; length--) {
      const counts = this.countsOf(length);
      const usable = [...counts].filter(([s]) => !excluded.has(s));
      if (usable.length === 0) continue;
      const sum = usable.reduce((a, [, count]) => a + count, 0);
      const isWhole = excluded.size + usable.length === this.alphabetSize;
      const total = isWhole ? sum : sum + counts.size;
      if (counts.has(symbol)) {
        if (counts.get(symbol)! < total) ratios.push(`${counts.get(symbol)}/${total}`);
        codedAt = length;
        break;
      }
      ratios.push(`${counts.size}/${total}`);
      for (const [s] of usable) excluded.add(s);
    }
    if (codedAt < 0 && this.alphabetSize - excluded.size > 1) {
      ratios.push(`1/${this.alphabetSize - excluded.size}`);
    }
    for (let length = this.order; length >= Math.max(codedAt, 0); length--) {
      const counts = this.countsOf(length);
      counts.set(symbol, (counts.get(symbol) ?? 0) + 1);
      const sum = [...counts.values()].reduce((a, b) => a + b, 0);
      if (sum + counts.size > this.halveAt && sum >= 2 * counts.size) {
        for (const [s, count] of counts) counts.set(s, Math.ceil(count / 2));
      }
    }
    this.history = [...this.history, symbol].slice(1);
    if (this.order === 0) this.history = [];
    this.position = (this.position + 1) % this.positions;
    return ratios;
  }

  countsOf(length: number): Map<number, number> {
    const key = `${this.position}/${length}:${this.history.slice(this.order - length).join()}`;
    let counts = this.contexts.get(key);
    if (counts === undefined) {
      counts = new Map();
      this.contexts.set(key, counts);
    }
    return counts;
  }
}
