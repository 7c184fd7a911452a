import { bitAccount } from '../account/bit-account.ts';
import type { Candidate } from '../coders/candidate.ts';
import type { Reset, TablePolicy } from '../coders/contract.ts';
import { type Cell, decodesAlone, listCells } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import { CorpusFloors } from './corpus-floors.ts';
import { corpusRecordOf } from './corpus-record.ts';
import { describeEnvironment, toolVersion } from './environment.ts';
import { Interrupted, pauseWith, type RunHooks } from './pause.ts';
import { type CellBits, type CellFailure, runCell } from './run-cell.ts';
import type { CellRecord, RunRecord } from './run-record.ts';
import { Pacer, type Speed } from './speed.ts';
import { symbolCountsOf } from './verify.ts';

/** Everything a run is made of, once plan and files are read. */
export interface RunRequest {
  readonly title: string;
  readonly corpora: readonly CorpusData[];
  readonly candidates: readonly Candidate[];
  readonly policies: readonly TablePolicy[];
  readonly resets: readonly Reset[];
  readonly align: number;
  /** How train and test were parted, in words. */
  readonly split: string;
  /** Absent: nothing is timed. */
  readonly timing?: { readonly repeats: number; readonly seconds: number };
  /** Only the cells whose id contains this text. */
  readonly only?: string;
}

/** Carried bits and symbols of each message of a cell. */
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
export function cellsOf(request: RunRequest): { cells: Cell[]; undeclared: number } {
  const { cells, undeclared } = listCells(
    request.corpora.map((c) => c.name),
    request.candidates,
    request.policies,
    request.resets,
  );
  const { only } = request;
  return {
    cells: only === undefined ? [...cells] : cells.filter((c) => c.id.includes(only)),
    undeclared,
  };
}

/** Runs every cell one after another on this thread, then holds each against the floor of its corpus. */
export async function runAll(request: RunRequest, hooks: RunHooks = {}): Promise<RunResult> {
  const { cells, undeclared } = cellsOf(request);
  const messages = new Map<string, MessagePairs>();
  const cellRecords: CellRecord[] = [];
  const entropy: RunRecord['entropy'] = [];
  let cellsDone = 0;
  let partial = false;
  const pauseFor = (current: string) =>
    pauseWith(hooks, () => ({ cellsDone, cellsTotal: cells.length, current }));
  for (const corpus of request.corpora) {
    const own = cells.filter((cell) => cell.corpus === corpus.name);
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
        const result = await runCell(cell, corpus, request.align, pause);
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
      cellRecords.push(recordOf(result, corpus, floors, speed));
      if (!('failure' in result)) {
        messages.set(result.cell.id, {
          bits: result.messageBits,
          symbols: Float64Array.from(symbolCountsOf(corpus.test)),
        });
      }
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
      },
      environment: describeEnvironment(),
      corpora: request.corpora.map(corpusRecordOf),
      entropy,
      cells: cellRecords,
      undeclared,
      partial,
    },
  };
}

function quantile(sorted: Float64Array, share: number): number {
  return sorted[Math.min(sorted.length - 1, Math.max(0, Math.ceil(share * sorted.length) - 1))];
}

function messageBytes(bits: Float64Array): NonNullable<CellRecord['message_bytes']> {
  const bytes = Float64Array.from(bits, (b) => b / 8).sort();
  let sum = 0;
  for (const value of bytes) sum += value;
  return {
    mean: sum / bytes.length,
    p50: quantile(bytes, 0.5),
    p95: quantile(bytes, 0.95),
    p99: quantile(bytes, 0.99),
    max: bytes[bytes.length - 1],
  };
}

function filesOf(bits: CellBits, corpus: CorpusData): NonNullable<CellRecord['files']> {
  let message = 0;
  let symbolsBefore = 0;
  return corpus.testFiles.map((file) => {
    let carried = 0;
    for (; message < file.messageEnd; message++) carried += bits.messageBits[message];
    const symbolEnd = message === 0 ? 0 : corpus.test.messageEnds[message - 1];
    const symbolCount = symbolEnd - symbolsBefore;
    symbolsBefore = symbolEnd;
    return { sha256: file.sha256, symbol_count: symbolCount, coded_bytes: Math.ceil(carried / 8) };
  });
}

function rateWithoutRepeats(bits: CellBits, corpus: CorpusData): number | undefined {
  const { repeated } = corpus;
  if (repeated === undefined || repeated.share === 0) return undefined;
  let carried = 0;
  let symbols = 0;
  let from = 0;
  corpus.test.messageEnds.forEach((end, i) => {
    if (repeated.mask[i] === 0) {
      carried += bits.messageBits[i];
      symbols += end - from;
    }
    from = end;
  });
  return symbols === 0 ? undefined : carried / symbols;
}

function recordOf(
  result: CellBits | CellFailure,
  corpus: CorpusData,
  floors: CorpusFloors,
  speed: { encode: Speed; decode: Speed } | undefined,
): CellRecord {
  const { cell } = result;
  const base = {
    id: cell.id,
    corpus: cell.corpus,
    candidate: cell.candidate.id,
    coder: cell.candidate.declaration.name,
    params: { ...cell.candidate.values },
    tables: cell.policy,
    reset: cell.reset,
    reference: cell.candidate.declaration.reference,
    decodes_alone: decodesAlone(cell),
    messages_as: corpus.messagesAs,
  };
  if ('failure' in result) return { ...base, verified: false, failure: result.failure };
  const symbolCount = corpus.test.symbols.length;
  const without = rateWithoutRepeats(result, corpus);
  return {
    ...base,
    verified: true,
    backend: 'ts',
    symbol_count: symbolCount,
    message_count: corpus.test.messageEnds.length,
    coded_bytes: Math.ceil(result.totals.carriedBits / 8),
    carried_bits: result.totals.carriedBits,
    rate: symbolCount === 0 ? 0 : result.totals.carriedBits / symbolCount,
    account: bitAccount(floors.admit(result), floors.shareOf(cell)),
    ...(result.messageBits.length === 0 ? {} : { message_bytes: messageBytes(result.messageBits) }),
    ...(without === undefined ? {} : { rate_without_repeats: without }),
    files: filesOf(result, corpus),
    ...(speed === undefined
      ? {}
      : { encode: speedRecord(speed.encode), decode: speedRecord(speed.decode) }),
  };
}

function speedRecord(speed: Speed): NonNullable<CellRecord['encode']> {
  return { ...speed, seconds: [...speed.seconds] };
}
