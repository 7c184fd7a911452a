import type { TimedTask } from '../../src/harness/time-sampler.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';

/** How unevenly a simulated machine runs. */
export interface MachineNoise {
  /** Standard deviation of the logarithm of a run's time. */
  readonly jitter: number;
  /** Share of runs that something else interrupts, which take 1.1 times as long or more, 1.6 on average. */
  readonly spikes: number;
  /** Swing of the machine's pace either way, over about 20 s. */
  readonly drift: number;
}

/** A clock, and tasks that move it: log-normal jitter, spikes with an exponential tail, and a slow swing that all tasks share. */
export class SimulatedMachine {
  #now = 0;
  readonly #generator: SeededGenerator;
  readonly #noise: MachineNoise;
  readonly #phase: number;

  constructor(seed: string, noise: MachineNoise) {
    this.#generator = new SeededGenerator(seed);
    this.#noise = noise;
    this.#phase = 2 * Math.PI * this.#generator.real();
  }

  readonly clock = (): number => this.#now;

  task(seconds: number): TimedTask {
    return {
      run: () => {
        const { jitter, spikes, drift } = this.#noise;
        const pace = 1 + drift * Math.sin(this.#phase + this.#now / 3);
        const spike =
          this.#generator.real() < spikes ? 1.1 - 0.5 * Math.log(1 - this.#generator.real()) : 1;
        this.#now += seconds * pace * spike * Math.exp(jitter * this.#normal());
      },
    };
  }

  /** Source: Box & Muller 1958. */
  #normal(): number {
    const radius = Math.sqrt(-2 * Math.log(1 - this.#generator.real()));
    return radius * Math.cos(2 * Math.PI * this.#generator.real());
  }
}
