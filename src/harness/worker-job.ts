import { parseCandidateWith } from '../coders/candidate.ts';
import type { CoderEntry } from '../coders/contract.ts';
import { BitassayError } from '../errors/errors.ts';
import type { Ageing } from './ageing.ts';
import type { Cell } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import type { FloorOptions } from './corpus-floors.ts';
import type { DamagePlan } from './damage-experiment.ts';
import type { CellDamage } from './damage-schema.ts';
import type { CellBits, CellStep } from './run-cell.ts';
import type { CellTimes, TimingOptions } from './time-cell.ts';

/** What crosses between a run and its workers: plain data only. */

/** What every worker knows from its start. */
export interface WorkerSetup {
  /** In shared memory. */
  readonly corpora: readonly CorpusData[];
  /** Modules (file addresses) whose `coders` are coder entries besides the registry's. */
  readonly modules: readonly string[];
  /** Bytes that one piece of work may take. */
  readonly memoryBytes: number;
}

/** A cell with its candidate as text. */
export type PlainCell = Omit<Cell, 'candidate'> & { readonly candidate: string };

export function plainCell(cell: Cell): PlainCell {
  return { ...cell, candidate: cell.candidate.id };
}

/** @throws InputError for a candidate that neither the registry nor `more` has */
export function cellOf(plain: PlainCell, more: readonly CoderEntry[]): Cell {
  return { ...plain, candidate: parseCandidateWith(plain.candidate, more) };
}

export type Job =
  | { readonly kind: 'bits'; readonly cell: PlainCell }
  | { readonly kind: 'times'; readonly cell: PlainCell; readonly options: TimingOptions }
  | {
      readonly kind: 'floors';
      readonly dataKey: string;
      readonly options: FloorOptions;
      readonly known: ReadonlyMap<string, unknown>;
    }
  | { readonly kind: 'ageing'; readonly cell: PlainCell; readonly messageEnds: Uint32Array }
  | { readonly kind: 'damage'; readonly cell: PlainCell; readonly plan: DamagePlan };

/** A cell's bits without what the run has anyway. */
export type PlainBits = Omit<CellBits, 'cell' | 'units' | 'messageEnds'> & {
  /** Only where messages are filled; else they are the corpus's. */
  readonly messageEnds?: Uint32Array;
};

/** What a job of each kind gives. */
export interface JobResults {
  readonly bits: PlainBits;
  readonly times: CellTimes | undefined;
  readonly floors: ReadonlyMap<string, unknown>;
  readonly ageing: Ageing | undefined;
  readonly damage: readonly CellDamage[];
}

export type Answer<K extends Job['kind']> =
  | { readonly result: JobResults[K]; readonly interrupted?: boolean }
  | { readonly failure: string };

/** A few numbers in shared memory, by which a run sees into a job that never comes back to its event loop, and stops one that does. */
export class JobBoard {
  readonly numbers: Int32Array<SharedArrayBuffer>;

  constructor(numbers = new Int32Array(new SharedArrayBuffer(8))) {
    this.numbers = numbers;
  }

  /** 0 before the job began; then one more than the index of its step in {@link STEPS}. */
  get step(): number {
    return Atomics.load(this.numbers, 0);
  }

  enter(step: CellStep | 'begin'): void {
    Atomics.store(this.numbers, 0, STEPS.indexOf(step) + 1);
  }

  get isStopped(): boolean {
    return Atomics.load(this.numbers, 1) === 1;
  }

  stop(): void {
    Atomics.store(this.numbers, 1, 1);
  }

  /** What the job is at, as the end of a sentence; empty where that says nothing. */
  get place(): string {
    return PLACES[this.step] ?? '';
  }
}

const STEPS: readonly (CellStep | 'begin')[] = ['begin', 'train', 'encode', 'decode', 'price'];
const PLACES = [
  '',
  '',
  ', while it was being trained',
  ', while it encoded',
  ', while it decoded',
  ', while its bits were being accounted for',
];

/** What is sent to a worker. */
export interface PostedJob {
  readonly job: Job;
  readonly board: Int32Array<SharedArrayBuffer>;
}

/** What was thrown, in words; a coder may throw anything, even what cannot be made a string. */
export function thrownText(thrown: unknown): string {
  try {
    if (thrown instanceof BitassayError) return thrown.message;
    if (thrown instanceof Error) return `${thrown.name}: ${thrown.message}`;
    const isObject = typeof thrown === 'object' && thrown !== null;
    return `threw ${isObject ? Object.prototype.toString.call(thrown) : String(thrown)}`;
  } catch {
    return 'threw something that cannot be shown';
  }
}
