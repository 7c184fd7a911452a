import { SingleBar } from 'cli-progress';
import type { RunProgress } from '../harness/pause.ts';
import { durationText } from '../report/figures.ts';

/** Shows on standard error where a run stands; silent where that is no terminal. */
export class ProgressLine {
  readonly #bar: SingleBar | undefined;
  readonly #noun: string;
  #start = performance.now();
  #started = false;
  #doing: RunProgress['doing'];

  /** @param noun  what is counted, in the plural */
  constructor(wanted: boolean, noun = 'cells') {
    this.#noun = noun;
    if (!wanted || process.stderr.isTTY !== true) return;
    this.#bar = new SingleBar({
      stream: process.stderr,
      clearOnComplete: true,
      hideCursor: null,
      etaBuffer: 10,
      format: ' {value} of {total} {noun}, {left} left, now {current}',
    });
  }

  show({ cellsDone, cellsTotal, current, doing }: RunProgress): void {
    const bar = this.#bar;
    if (bar === undefined) return;
    if (doing !== this.#doing) {
      // Another count, with a pace of its own.
      this.#doing = doing;
      this.#start = performance.now();
      if (this.#started) bar.setTotal(cellsTotal);
    }
    const seconds = (performance.now() - this.#start) / 1000;
    const left =
      cellsDone === 0
        ? 'time unknown'
        : durationText((seconds / cellsDone) * (cellsTotal - cellsDone));
    const noun = doing === 'timing' ? `${this.#noun} timed` : this.#noun;
    const payload = { noun, left, current: current.slice(0, 60) };
    if (this.#started) bar.update(cellsDone, payload);
    else bar.start(cellsTotal, cellsDone, payload);
    this.#started = true;
  }

  stop(): void {
    this.#bar?.stop();
  }
}
