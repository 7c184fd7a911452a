import { setFlagsFromString } from 'node:v8';
import { runInNewContext } from 'node:vm';
import { LimitError } from '../errors/errors.ts';

/** Looks at memory cost some tens of microseconds, and steps of short units can be shorter. */
const LOOK_MILLISECONDS = 5;

/** Heap and typed arrays of this thread; what is shared with others is not counted. */
function usedBytes(): number {
  const { heapUsed, arrayBuffers } = process.memoryUsage();
  return heapUsed + arrayBuffers;
}

/** Made when first needed: most threads never come near their bound. */
let collect: (() => void) | undefined;

function collectGarbage(): void {
  if (collect === undefined) {
    setFlagsFromString('--expose-gc');
    collect = runInNewContext('gc') as () => void;
  }
  collect();
}

/** Holds what one thread takes to a bound, from when it was made. To be asked between steps. */
export class MemoryGuard {
  readonly #mostBytes: number;
  readonly #atStart = usedBytes();
  #looked = 0;

  constructor(mostBytes: number) {
    this.#mostBytes = mostBytes;
  }

  /** @throws LimitError when more is in use, garbage apart */
  check(): void {
    const now = performance.now();
    if (now - this.#looked < LOOK_MILLISECONDS) return;
    this.#looked = now;
    if (usedBytes() - this.#atStart <= this.#mostBytes) return;
    collectGarbage();
    const used = usedBytes() - this.#atStart;
    if (used <= this.#mostBytes) return;
    throw new LimitError(memoryReason(this.#mostBytes), { got: `${used} bytes` });
  }
}

/** Why a cell failed that took too much. */
export function memoryReason(mostBytes: number, place = ''): string {
  return `took more memory than budget.cell_memory, ${Math.round(mostBytes / 1e6)} MB${place}`;
}
