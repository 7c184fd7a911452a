import type { ContextScope } from '../models/context-counts.ts';
import { cellRecordOf } from './cell-record.ts';
import { type Cell, listCells } from './cells.ts';
import { CorpusFloors, scopeOf } from './corpus-floors.ts';
import { corpusRecordOf } from './corpus-record.ts';
import { describeEnvironment, toolVersion } from './environment.ts';
import { Interrupted, pauseWith, type RunHooks } from './pause.ts';
import type { MessagePairs, RunRequest, RunResult } from './run-all.ts';
import type { CellBits, CellFailure } from './run-cell.ts';
import type { CellRecord, RunRecord } from './run-record.ts';
import { runStreamedCell } from './stream-cell.ts';
import { type CountedScope, countStreamed, highestOrderOf } from './stream-counts.ts';
import type { StreamedData } from './stream-data.ts';

/** A run over corpora that are read in pieces: what a plan may ask of others besides is not done, and said. */
export interface StreamedRequest
  extends Pick<
    RunRequest,
    | 'title'
    | 'candidates'
    | 'policies'
    | 'resets'
    | 'align'
    | 'lossRate'
    | 'billStepBytes'
    | 'device'
    | 'split'
    | 'only'
  > {
  readonly corpora: readonly StreamedData[];
  readonly memoryBytes: number;
  /** Most bytes of a growing model. */
  readonly modelBytes: number;
}

/** The cells of a request, filtered by `only`. */
export function streamedCellsOf(request: StreamedRequest): { cells: Cell[]; undeclared: number } {
  const shapes = request.corpora.map(({ shape }) => shape);
  const records = shapes.filter((c) => c.record !== undefined).map((c) => c.name);
  const { cells, undeclared } = listCells(
    shapes.map((c) => c.name),
    request.candidates,
    request.policies,
    request.resets,
    { records: new Set(records), align: request.align },
  );
  const { only } = request;
  return {
    cells: only === undefined ? [...cells] : cells.filter((c) => c.id.includes(only)),
    undeclared,
  };
}

/** Entropies, cells and floors of each corpus, one cell after another, each symbol read from the files whenever it is needed. */
export async function runStreamed(
  request: StreamedRequest,
  hooks: RunHooks = {},
): Promise<RunResult> {
  const { cells, undeclared } = streamedCellsOf(request);
  const messages = new Map<string, MessagePairs>();
  const cellRecords: CellRecord[] = [];
  const entropy: RunRecord['entropy'] = [];
  let cellsDone = 0;
  let partial = false;
  for (const data of request.corpora) {
    const own = cells.filter((cell) => cell.corpus === data.shape.name);
    if (own.length === 0 || partial) continue;
    const results: (CellBits | CellFailure)[] = [];
    const counted = new Map<ContextScope, CountedScope>();
    const pauseFor = (current: string) =>
      pauseWith(hooks, () => ({ cellsDone, cellsTotal: cells.length, current }));
    try {
      const upto = highestOrderOf(data);
      const pause = pauseFor(`${data.shape.name}: entropy`);
      for (const scope of new Set(own.map((cell) => scopeOf(cell, data.shape))))
        counted.set(scope, await countStreamed(data, scope, { upto }, pause));
      for (const cell of own) {
        const result = await runStreamedCell(
          cell,
          data,
          {
            modelBytes: request.modelBytes,
            fitBits: (of, order) => counted.get(scopeOf(of, data.shape))?.fitBits[order],
          },
          pauseFor(cell.id),
        );
        results.push(result);
        cellsDone++;
      }
    } catch (error) {
      if (!(error instanceof Interrupted)) throw error;
      partial = true;
    }
    const floors = new CorpusFloors(
      data.shape,
      new Map([...counted].map(([scope, { entropy: found }]) => [scope, found])),
    );
    await floors.buildForCells(results, false, async () => {});
    entropy.push(...floors.records());
    const symbols = symbolCountsOf(data.shape.test.messageEnds);
    for (const result of results) {
      cellRecords.push(cellRecordOf(result, data.shape, floors, undefined, request));
      if (!('failure' in result))
        messages.set(result.cell.id, { bits: result.messageBits, symbols });
    }
  }
  hooks.progress?.({ cellsDone, cellsTotal: cells.length, current: '' });
  return {
    messages,
    record: {
      record: 1,
      tool: { name: 'bitassay', version: toolVersion() },
      plan: planRecordOf(request),
      environment: describeEnvironment(),
      corpora: request.corpora.map(({ shape }) => ({
        ...corpusRecordOf(shape),
        in_pieces: true as const,
      })),
      entropy,
      cells: cellRecords,
      undeclared,
      partial,
    },
  };
}

function planRecordOf(request: StreamedRequest): RunRecord['plan'] {
  return {
    title: request.title,
    align: request.align,
    split: request.split,
    tables: [...request.policies],
    resets: [...request.resets],
    ...(request.lossRate === undefined ? {} : { loss_rate: request.lossRate }),
    ...(request.billStepBytes === undefined ? {} : { bill_step_bytes: request.billStepBytes }),
    ...(request.device === undefined ? {} : { product: { device: request.device } }),
    memory_bytes: request.memoryBytes,
  };
}

function symbolCountsOf(messageEnds: Uint32Array): Float64Array {
  const counts = new Float64Array(messageEnds.length);
  let from = 0;
  messageEnds.forEach((end, i) => {
    counts[i] = end - from;
    from = end;
  });
  return counts;
}

/** One result of two runs of a plan over different corpora: those that memory holds, and those that are read in pieces. */
export function joinResults(whole: RunResult, streamed: RunResult): RunResult {
  const { record } = whole;
  const other = streamed.record;
  return {
    messages: new Map([...whole.messages, ...streamed.messages]),
    record: {
      ...record,
      plan: { ...record.plan, memory_bytes: other.plan.memory_bytes },
      corpora: [...record.corpora, ...other.corpora],
      entropy: [...record.entropy, ...other.entropy],
      cells: [...record.cells, ...other.cells],
      undeclared: record.undeclared + other.undeclared,
      partial: record.partial || other.partial,
    },
  };
}
