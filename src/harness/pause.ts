/** Where a run stands, for whoever shows it. */
export interface RunProgress {
  readonly cellsDone: number;
  readonly cellsTotal: number;
  /** Cells, or other pieces of work, in hand. */
  readonly current: string;
  /** What `cellsDone` counts, where a run does one after the other. */
  readonly doing?: 'coding' | 'timing';
}

export interface RunHooks {
  progress?(progress: RunProgress): void;
  /** Asked between steps; true ends the run with what it has. */
  interrupted?(): boolean;
}

/** Thrown by a pause when the run was interrupted; caught by whoever runs. */
export class Interrupted extends Error {}

/** A pause between steps: shows where the run stands, lets an interrupt arrive, and throws {@link Interrupted} if one did. */
export function pauseWith(hooks: RunHooks, state: () => RunProgress): () => Promise<void> {
  return async () => {
    hooks.progress?.(state());
    await new Promise((resolve) => setImmediate(resolve));
    if (hooks.interrupted?.()) throw new Interrupted();
  };
}
