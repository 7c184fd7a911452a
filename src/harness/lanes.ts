/** Lets so many works go on at a time, first come, first served; one that takes all lanes has nothing beside it. */
export class Lanes {
  readonly #count: number;
  #free: number;
  readonly #waiting: { readonly wanted: number; readonly go: () => void }[] = [];

  constructor(count: number) {
    this.#count = count;
    this.#free = count;
  }

  run<T>(work: () => Promise<T>): Promise<T> {
    return this.#with(1, work);
  }

  /** Waits for what goes on to end, and holds back what comes after. */
  runAlone<T>(work: () => Promise<T>): Promise<T> {
    return this.#with(this.#count, work);
  }

  async #with<T>(wanted: number, work: () => Promise<T>): Promise<T> {
    if (this.#waiting.length > 0 || this.#free < wanted) {
      await new Promise<void>((go) => {
        this.#waiting.push({ wanted, go });
      });
    } else {
      this.#free -= wanted;
    }
    try {
      return await work();
    } finally {
      this.#free += wanted;
      this.#admit();
    }
  }

  #admit(): void {
    while (this.#waiting.length > 0 && this.#waiting[0].wanted <= this.#free) {
      const { wanted, go } = this.#waiting.shift()!;
      this.#free -= wanted;
      go();
    }
  }
}
