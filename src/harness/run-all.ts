import type { Candidate } from '../coders/candidate.ts';
import type { Reset, TablePolicy } from '../coders/contract.ts';
import { symbolCountsOf } from '../coders/verify.ts';
import type { Plan } from '../corpus/plan.ts';
import type { CellBudget } from './budget.ts';
import { cellRecordOf } from './cell-record.ts';
import { type Cell, listCells } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import { corpusRecordsOf } from './corpus-record.ts';
import type { DamagePlan } from './damage-experiment.ts';
import { describeEnvironment, toolVersion } from './environment.ts';
import type { Executor } from './executor.ts';
import { bitsOfCorpusMessages } from './fill-figures.ts';
import type { RunHooks } from './pause.ts';
import { RunBoard } from './run-board.ts';
import { damageRecordOf } from './run-damage.ts';
import { type CellGroup, type CodedGroup, codeGroup } from './run-group.ts';
import type { CellRecord, RunRecord } from './run-record.ts';
import { type RunTimes, timeCells } from './run-times.ts';
import { ThisThread } from './this-thread.ts';
import type { TimingOptions } from './time-cell.ts';
import { codedGroups, varyCells } from './variation-cells.ts';

/** Everything a run is made of, once plan and files are read. */
export interface RunRequest {
  readonly title: string;
  readonly corpora: readonly CorpusData[];
  readonly candidates: readonly Candidate[];
  readonly policies: readonly TablePolicy[];
  readonly resets: readonly Reset[];
  readonly align: number;
  /** Alignments that cells are run for besides. */
  readonly aligns?: readonly number[];
  /** Share of messages lost on the way; absent: not asked. */
  readonly lossRate?: number;
  /** Damage that is simulated; absent: not asked. */
  readonly damage?: DamagePlan;
  /** Bytes in which a link bills each message; absent: not asked. */
  readonly billStepBytes?: number;
  /** The small end of the product, where the plan names it. */
  readonly device?: 'encoder' | 'decoder';
  /** What a choice from the run is to be made by, and a gate: kept in its record. */
  readonly decision?: Plan['decision'];
  /** What a cell may take, where cells are run in workers; the usual when absent. */
  readonly budget?: CellBudget;
  /** How train and test were parted, in words. */
  readonly split: string;
  /** Train lies before test in time: say how shipped tables age. */
  readonly ageing?: boolean;
  /** Absent: nothing is timed. */
  readonly timing?: TimingOptions;
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
  const {
    cells: own,
    undeclared,
    notFilled,
  } = listCells(
    [...new Set(request.corpora.map((c) => c.name))],
    request.candidates,
    request.policies,
    request.resets,
    { filled: new Set(filled), records: new Set(records), align: request.align },
  );
  const { only } = request;
  const cells = varyCells(own, request.corpora, request.aligns ?? []);
  return {
    cells: only === undefined ? cells : cells.filter((c) => c.id.includes(only)),
    undeclared,
    notFilled,
  };
}

/**
 * Codes every cell, holds each against the floor of its data, then times them one at a time. The record does not depend on
 * where the work is done nor on the order in which it ends.
 * @param executor  where the work is done; on this thread when absent
 */
export async function runAll(
  request: RunRequest,
  hooks: RunHooks = {},
  executor: Executor = new ThisThread(),
): Promise<RunResult> {
  const { cells, undeclared, notFilled } = cellsOf(request);
  const board = new RunBoard(hooks, cells.length);
  const groups: CellGroup[] = codedGroups(request.corpora)
    .map((data) => ({
      data,
      cells: cells.filter((cell) => data.some(({ key }) => key === cell.dataKey)),
    }))
    .filter((group) => group.cells.length > 0);
  const coded: CodedGroup[] = [];
  let timed: RunTimes;
  try {
    const ages = request.ageing === true;
    const running = groups.map((group) => codeGroup(group, ages, executor, board, request.damage));
    coded.push(...(await Promise.all(running)));
    timed = await timeCells(coded, request.corpora, request.timing, executor, board);
  } catch (error) {
    board.giveUp();
    throw error;
  }
  const partial = timed.partial || coded.some((group) => group.partial);
  const ageing = coded.flatMap((group) => group.ageing ?? []);
  const { cellRecords, messages } = cellResultsOf(coded, timed, request);
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
        ...(request.damage === undefined ? {} : { damage: request.damage }),
        ...(request.billStepBytes === undefined ? {} : { bill_step_bytes: request.billStepBytes }),
        ...(request.device === undefined ? {} : { product: { device: request.device } }),
        ...request.decision,
      },
      environment: describeEnvironment(),
      corpora: corpusRecordsOf(request.corpora),
      entropy: coded.flatMap(({ floors }) => floors.records()),
      cells: cellRecords,
      ...(ageing.length === 0 ? {} : { ageing }),
      undeclared,
      ...(notFilled === 0 ? {} : { not_filled: notFilled }),
      partial,
    },
  };
}

/** What the record says of each cell, and the message figures that stand beside it. */
function cellResultsOf(
  coded: readonly CodedGroup[],
  { times, failures }: RunTimes,
  request: RunRequest,
): { cellRecords: CellRecord[]; messages: Map<string, MessagePairs> } {
  const dataOf = new Map(request.corpora.map((corpus) => [corpus.key, corpus]));
  const messages = new Map<string, MessagePairs>();
  const cellRecords = coded.flatMap(({ results, corpus, floors, damage }) =>
    results.map((coded) => {
      const result = failures.get(coded.cell.id) ?? coded;
      if (!('failure' in result)) {
        messages.set(result.cell.id, {
          bits: bitsOfCorpusMessages(result, corpus),
          symbols: Float64Array.from(symbolCountsOf(corpus.test)),
        });
      }
      const data = dataOf.get(result.cell.dataKey)!;
      const record = cellRecordOf(result, data, floors, times.get(result.cell.id), request);
      return record.verified ? { ...record, ...damageRecordOf(damage.get(record.id)) } : record;
    }),
  );
  return { cellRecords, messages };
}
