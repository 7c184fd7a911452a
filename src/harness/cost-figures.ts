import type { Coded, Coder, Setup } from '../coders/contract.ts';
import {
  addOperations,
  atBothEnds,
  type BothEnds,
  type EndCost,
  type EndOperations,
  mostOf,
} from '../coders/cost.ts';
import { OPERATIONS, type OperationCounts } from '../models/counting-tally.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { CellRecord } from './run-record.ts';

/** What a cell would take on a device, as far as its coder tells. */
export interface CostFigures {
  readonly costs?: BothEnds<EndCost>;
  readonly operations?: EndOperations;
  /** Coded bytes that a decoder holds before its first symbol, on average over messages; absent: the coder does not say. */
  readonly delayBytes?: number;
  /** The decoder holds the whole message. */
  readonly holdsMessage?: boolean;
}

/** A unit of a cell as it was coded. */
interface Unit {
  readonly messages: SymbolSequence;
  readonly setup: Setup;
  readonly coded: Coded;
}

/** Longest and mean message, in coded bytes; 0 where there is none. */
function messageBytesOf(units: readonly Unit[]): { longest: number; mean: number; count: number } {
  let longest = 0;
  let sum = 0;
  let count = 0;
  for (const { coded } of units) {
    let from = 0;
    for (const end of coded.messageEndsBits) {
      longest = Math.max(longest, Math.ceil((end - from) / 8));
      sum += (end - from) / 8;
      count++;
      from = end;
    }
  }
  return { longest, mean: count === 0 ? 0 : sum / count, count };
}

/**
 * Costs, operations and decode delay of a cell that was coded; a pass of its own over its symbols. Where tables are sent or
 * grow, an end costs the most that any unit takes.
 *
 * Delay: what the coder's decoder looks at, with the tables that stand before it: under reset `message` their mean over
 * messages, otherwise those of one unit; never more than the longest message and the alphabet map.
 * @param mapBits  bits of the alphabet map, sent once before all messages
 */
export function costFigures(coder: Coder, units: readonly Unit[], mapBits: number): CostFigures {
  if (units.length === 0) return {};
  const { longest, mean, count } = messageBytesOf(units);
  const { setup } = units[0];
  const holds = count === 0 ? undefined : coder.decoderHolds?.(setup);
  // What both ends have beforehand is the same for all units.
  const isShipped = setup.policy === 'shipped' || setup.policy === 'none';
  let costs: BothEnds<EndCost> | undefined;
  let operations: EndOperations | undefined;
  for (const { messages, setup: own } of units) {
    const counted = coder.operations?.(messages, own);
    if (counted !== undefined)
      operations = operations === undefined ? counted : addOperations(operations, counted);
    if (costs !== undefined && isShipped) continue;
    const cost = coder.costs?.(own, longest, messages);
    if (cost !== undefined) costs = costs === undefined ? cost : atBothEnds(costs, cost, mostOf);
  }
  return {
    ...(costs === undefined ? {} : { costs }),
    ...(operations === undefined ? {} : { operations }),
    ...(holds === undefined
      ? {}
      : holds === 'message'
        ? { delayBytes: mean, holdsMessage: true }
        : { delayBytes: delayOf(holds, units, count, longest, mapBits) }),
  };
}

function delayOf(
  windowBytes: number,
  units: readonly Unit[],
  messageCount: number,
  longestBytes: number,
  mapBits: number,
): number {
  let tableBits = 0;
  for (const { coded } of units) tableBits += coded.account.tableBits;
  const tables = units[0].setup.reset === 'message' ? messageCount : units.length;
  const bytes = windowBytes + tableBits / tables / 8;
  return Math.min(bytes, longestBytes) + mapBits / 8;
}

/** The parts of a cell's record that these figures fill. */
export function costRecord({
  costs,
  operations,
  delayBytes,
  holdsMessage,
}: CostFigures): Pick<
  CellRecord,
  'encoder' | 'decoder' | 'decode_delay_bytes' | 'holds_whole_message'
> {
  const end = (which: 'encoder' | 'decoder'): CellRecord['encoder'] => {
    const cost = costs?.[which];
    const counts = operations?.[which];
    if (cost === undefined && counts === undefined) return undefined;
    return {
      ...(cost === undefined
        ? {}
        : {
            flash_bytes: cost.flashBytes,
            ram_bytes: cost.ramBytes,
            code_bytes: cost.codeBytes,
          }),
      ...(counts === undefined ? {} : { operations: operationsRecord(counts) }),
    };
  };
  const encoder = end('encoder');
  const decoder = end('decoder');
  return {
    ...(encoder === undefined ? {} : { encoder }),
    ...(decoder === undefined ? {} : { decoder }),
    ...(delayBytes === undefined ? {} : { decode_delay_bytes: delayBytes }),
    ...(holdsMessage === true ? { holds_whole_message: true } : {}),
  };
}

const RECORD_NAMES = {
  multiplies: 'multiplies',
  divides: 'divides',
  tableReads: 'table_reads',
  branches: 'branches',
} as const;

type OperationsRecord = NonNullable<NonNullable<CellRecord['encoder']>['operations']>;

function operationsRecord({ symbolCount, total, worst }: OperationCounts): OperationsRecord {
  return Object.fromEntries(
    OPERATIONS.map((kind) => [
      RECORD_NAMES[kind],
      {
        total: total[kind],
        mean: symbolCount === 0 ? 0 : total[kind] / symbolCount,
        worst: worst[kind],
      },
    ]),
  ) as OperationsRecord;
}
