import type { Control } from './executor.ts';
import { pauseWith, type RunHooks, type RunProgress } from './pause.ts';

/** Where a run stands: what is under way, how much is done, whether to go on. */
export class RunBoard {
  readonly #hooks: RunHooks;
  readonly #active: string[] = [];
  #total: number;
  #done = 0;
  #doing: NonNullable<RunProgress['doing']> = 'coding';
  #given = false;

  constructor(hooks: RunHooks, cellsTotal: number) {
    this.#hooks = hooks;
    this.#total = cellsTotal;
  }

  /** No further work begins, as after an interrupt. */
  giveUp(): void {
    this.#given = true;
  }

  get interrupted(): boolean {
    return this.#given || this.#hooks.interrupted?.() === true;
  }

  /** From here on cells are timed, so many. */
  beginTiming(cellsTotal: number): void {
    this.#total = cellsTotal;
    this.#done = 0;
    this.#doing = 'timing';
  }

  /** Shows `name` while its work is under way. */
  async watch<T>(name: string, work: (control: Control) => Promise<T>): Promise<T> {
    const hooks: RunHooks = { ...this.#hooks, interrupted: () => this.interrupted };
    try {
      return await work({
        begun: () => {
          this.#active.push(name);
          this.#show();
        },
        pause: pauseWith(hooks, () => this.#state()),
        interrupted: () => this.interrupted,
      });
    } finally {
      const at = this.#active.indexOf(name);
      if (at >= 0) this.#active.splice(at, 1);
    }
  }

  cellDone(): void {
    this.#done++;
    this.#show();
  }

  #show(): void {
    this.#hooks.progress?.(this.#state());
  }

  #state(): RunProgress {
    return {
      cellsDone: this.#done,
      cellsTotal: this.#total,
      current: this.#active.join(', '),
      doing: this.#doing,
    };
  }
}
