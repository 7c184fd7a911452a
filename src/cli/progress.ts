import { SingleBar } from 'cli-progress';
import type { RunProgress } from '../harness/pause.ts';
import { durationText } from '../report/figures.ts';

/** Shows on standard error where a run stands; silent where that is no terminal. */
export class ProgressLine {
  readonly #bar: SingleBar | undefined;
  readonly #start = performance.now();
  #started = false;

  /** @param noun  what is counted, in the plural */
  constructor(wanted: boolean, noun = 'cells') {
    if (!wanted || process.stderr.isTTY !== true) return;
    this.#bar = new SingleBar({
      stream: process.stderr,
      clearOnComplete: true,
      hideCursor: null,
      etaBuffer: 10,
      format: ` {value} of {total} ${noun}, {left} left, now {current}`,
    });
  }

  show({ cellsDone, cellsTotal, current }: RunProgress): void {
    const bar = this.#bar;
    if (bar === undefined) return;
    const seconds = (performance.now() - this.#start) / 1000;
    const left =
      cellsDone === 0
        ? 'time unknown'
        : durationText((seconds / cellsDone) * (cellsTotal - cellsDone));
    const payload = { left, current: current.slice(0, 60) };
    if (this.#started) bar.update(cellsDone, payload);
    else bar.start(cellsTotal, cellsDone, payload);
    this.#started = true;
  }

  stop(): void {
    this.#bar?.stop();
  }
}
