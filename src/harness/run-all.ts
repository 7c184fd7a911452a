import type { Candidate } from '../coders/candidate.ts';
import type { Reset, TablePolicy } from '../coders/contract.ts';
import { symbolCountsOf } from '../coders/verify.ts';
import { ageingOf, ageingRecordOf } from './ageing.ts';
import { cellRecordOf } from './cell-record.ts';
import { type Cell, listCells } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import { CorpusFloors } from './corpus-floors.ts';
import { corpusRecordOf } from './corpus-record.ts';
import { describeEnvironment, toolVersion } from './environment.ts';
import { bitsOfCorpusMessages } from './fill-figures.ts';
import { Interrupted, pauseWith, type RunHooks } from './pause.ts';
import { type CellBits, type CellFailure, runCell } from './run-cell.ts';
import type { CellRecord, RunRecord } from './run-record.ts';
import { Pacer, type Speed } from './speed.ts';

/** Everything a run is made of, once plan and files are read. */
export interface RunRequest {
  readonly title: string;
  readonly corpora: readonly CorpusData[];
  readonly candidates: readonly Candidate[];
  readonly policies: readonly TablePolicy[];
  readonly resets: readonly Reset[];
  readonly align: number;
  /** Share of messages lost on the way; absent: not asked. */
  readonly lossRate?: number;
  /** Bytes in which a link bills each message; absent: not asked. */
  readonly billStepBytes?: number;
  /** The small end of the product, where the plan names it. */
  readonly device?: 'encoder' | 'decoder';
  /** How train and test were parted, in words. */
  readonly split: string;
  /** Train lies before test in time: say how shipped tables age. */
  readonly ageing?: boolean;
  /** Absent: nothing is timed. */
  readonly timing?: { readonly repeats: number; readonly seconds: number };
  /** Only the cells whose id contains this text. */
  readonly only?: string;
}

/** Carried bits and symbols of each message of a cell; of each unit where messages are filled. */
export interface MessagePairs {
  readonly bits: Float64Array;
  readonly symbols: Float64Array;
}

export interface RunResult {
  readonly record: RunRecord;
  /** By cell id, verified cells only. */
  readonly messages: ReadonlyMap<string, MessagePairs>;
}

/** The cells of a request, filtered by `only`. */
export function cellsOf(request: RunRequest): {
  cells: Cell[];
  undeclared: number;
  notFilled: number;
} {
  const filled = request.corpora.filter((c) => c.fill !== undefined).map((c) => c.name);
  const records = request.corpora.filter((c) => c.record !== undefined).map((c) => c.name);
  const { cells, undeclared, notFilled } = listCells(
    request.corpora.map((c) => c.name),
    request.candidates,
    request.policies,
    request.resets,
    { filled: new Set(filled), records: new Set(records), align: request.align },
  );
  const { only } = request;
  return {
    cells: only === undefined ? [...cells] : cells.filter((c) => c.id.includes(only)),
    undeclared,
    notFilled,
  };
}

/** Runs every cell one after another on this thread, then holds each against the floor of its corpus. */
export async function runAll(request: RunRequest, hooks: RunHooks = {}): Promise<RunResult> {
  const { cells, undeclared, notFilled } = cellsOf(request);
  const messages = new Map<string, MessagePairs>();
  const cellRecords: CellRecord[] = [];
  const entropy: RunRecord['entropy'] = [];
  const ageing: NonNullable<RunRecord['ageing']> = [];
  let cellsDone = 0;
  let partial = false;
  const pauseFor = (current: string) =>
    pauseWith(hooks, () => ({ cellsDone, cellsTotal: cells.length, current }));
  for (const corpus of request.corpora) {
    const own = cells.filter((cell) => cell.dataKey === corpus.key);
    if (own.length === 0 || partial) continue;
    const results: (CellBits | CellFailure)[] = [];
    const speeds = new Map<string, { encode: Speed; decode: Speed }>();
    const pacer =
      request.timing === undefined || corpus.test.symbols.length === 0
        ? undefined
        : new Pacer(corpus.test);
    const floors = new CorpusFloors(corpus);
    try {
      for (const cell of own) {
        const pause = pauseFor(cell.id);
        const result = await runCell(cell, corpus, pause);
        if (!('failure' in result) && pacer !== undefined) {
          await pause();
          speeds.set(cell.id, pacer.time(result, { ...request.timing!, seed: cellsDone }));
        }
        // Coded units are needed for timing only; letting them go keeps memory to one cell's.
        results.push('failure' in result ? result : { ...result, units: [] });
        cellsDone++;
      }
    } catch (error) {
      if (!(error instanceof Interrupted)) throw error;
      partial = true;
    }
    try {
      if (!partial) await floors.buildForCells(results, true, pauseFor(`${corpus.name}: entropy`));
    } catch (error) {
      if (!(error instanceof Interrupted)) throw error;
      partial = true;
    }
    // What was coded is kept: the floor is then held by the cells themselves, without coders run for it alone.
    if (partial) await floors.buildForCells(results, false, async () => {});
    entropy.push(...floors.records());
    for (const result of results) {
      const speed = speeds.get(result.cell.id);
      cellRecords.push(cellRecordOf(result, corpus, floors, speed, request));
      if (!('failure' in result)) {
        messages.set(result.cell.id, {
          bits: bitsOfCorpusMessages(result, corpus),
          symbols: Float64Array.from(symbolCountsOf(corpus.test)),
        });
      }
    }
    const shipped = partial || !request.ageing ? undefined : bestShipped(results);
    if (shipped !== undefined) {
      hooks.progress?.({ cellsDone, cellsTotal: cells.length, current: `${corpus.name}: ageing` });
      const found = ageingOf(shipped.cell, corpus, shipped.messageEnds);
      if (found !== undefined) ageing.push(ageingRecordOf(corpus.name, found));
    }
  }
  hooks.progress?.({ cellsDone, cellsTotal: cells.length, current: '' });
  return {
    messages,
    record: {
      record: 1,
      tool: { name: 'bitassay', version: toolVersion() },
      plan: {
        title: request.title,
        align: request.align,
        split: request.split,
        tables: [...request.policies],
        resets: [...request.resets],
        ...(request.lossRate === undefined ? {} : { loss_rate: request.lossRate }),
        ...(request.billStepBytes === undefined ? {} : { bill_step_bytes: request.billStepBytes }),
        ...(request.device === undefined ? {} : { product: { device: request.device } }),
      },
      environment: describeEnvironment(),
      corpora: request.corpora.map(corpusRecordOf),
      entropy,
      cells: cellRecords,
      ...(ageing.length === 0 ? {} : { ageing }),
      undeclared,
      ...(notFilled === 0 ? {} : { not_filled: notFilled }),
      partial,
    },
  };
}

/** The shipped cell of least rate that is no reference. */
function bestShipped(results: readonly (CellBits | CellFailure)[]): CellBits | undefined {
  let best: CellBits | undefined;
  for (const result of results) {
    if ('failure' in result || result.cell.policy !== 'shipped') continue;
    if (result.cell.candidate.declaration.reference) continue;
    if (best === undefined || result.totals.carriedBits < best.totals.carriedBits) best = result;
  }
  return best;
}
