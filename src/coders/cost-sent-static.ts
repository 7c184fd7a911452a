import { BitWriter } from '../bits/bit-writer.ts';
import { slotsFor } from '../models/counting-contexts.ts';
import { CountingStatic } from '../models/counting-static.ts';
import { OperationTally } from '../models/counting-tally.ts';
import { PairTree } from '../models/pair-tree.ts';
import { roundCount } from '../models/sent-table.ts';
import { compileTable, type StaticTable } from '../models/static-table.ts';
import { CountingRange } from '../stages/counting-range.ts';
import { RangeEncoder } from '../stages/range-encoder.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { ArithSettings } from './arith-settings.ts';
import { tablesFor } from './arith-tables.ts';
import type { Setup } from './contract.ts';
import {
  atBothEnds,
  type BothEnds,
  type CodeEstimate,
  type EndCost,
  type EndOperations,
  endCost,
  integerBytes,
  mostOf,
} from './cost.ts';
import { rangeStateBytes, staticTableBytes } from './cost-static.ts';

/** As with shipped tables; count strings, carry them, sort them, quantise; read strings, sort them, quantise. */
const SENT_CODE: BothEnds<CodeEstimate> = {
  encoder: { statements: 44 + 130, nestedCalls: 5 },
  decoder: { statements: 48 + 120, nestedCalls: 5 },
};

/** Weights of 2 bytes: 36 models of bit lengths for sizes and gaps, 34 for counts, each of 33 lengths. */
const TABLE_MODEL_BYTES = 2 * (36 + 34) * 33;

/** A table as it is fitted to so many symbols. */
interface Fitted {
  readonly table: StaticTable;
  readonly nodes: number;
  readonly symbolCount: number;
}

/** Calls `take` with the table of each message, or of the unit, and the symbols that it codes. */
function eachTable(
  settings: ArithSettings,
  { symbols, messageEnds, alphabetSize }: SymbolSequence,
  setup: Setup,
  take: (fitted: Fitted, messages: Uint32Array, from: number) => void,
): void {
  const { order, positions } = settings;
  const compiled = (pairs: PairTree, symbolCount: number): Fitted => ({
    table: compileTable(
      pairs.tree,
      order,
      'none',
      { bits: settings.totalBits(alphabetSize) },
      roundCount,
    ),
    nodes: pairs.tree.nodeCount,
    symbolCount,
  });
  if (setup.reset === 'never') {
    take(compiled(tablesFor(setup, 'sent').pairs, symbols.length), messageEnds, 0);
    return;
  }
  const pairs = new PairTree(alphabetSize, order, positions);
  let from = 0;
  for (const to of messageEnds) {
    if (to > from) {
      pairs.clear();
      pairs.count(symbols, from, to);
      take(compiled(pairs, to - from), Uint32Array.of(to), from);
    }
    from = to;
  }
}

/** Counts the symbols of each message with the table that is sent for it; what the tables take is not among them. */
export function sentStaticOperations(
  settings: ArithSettings,
  sequence: SymbolSequence,
  setup: Setup,
): EndOperations {
  const encoder = new OperationTally();
  const decoder = new OperationTally();
  const stage = new RangeEncoder(new BitWriter(), settings.rangeBits);
  const sink = new CountingRange(stage, encoder, decoder);
  eachTable(settings, sequence, setup, ({ table }, messages, first) => {
    const counting = new CountingStatic(table, encoder, decoder);
    let from = first;
    for (const to of messages) {
      stage.beginApart();
      counting.code(sequence.symbols, from, to, sink);
      from = to;
    }
  });
  return { encoder: encoder.counts(), decoder: decoder.counts() };
}

/**
 * Costs where tables are sent, for the one that takes most: all of it in RAM.
 *
 * Both ends: the table as shipped ones are laid out; the strings that it is made from, each with parent, symbol and count, and slots
 * to find them; to sort them two lists of strings and two of entries; the models that carry the table, and a bit length for each
 * symbol. The message itself is the caller's.
 */
export function sentStaticCosts(
  settings: ArithSettings,
  sequence: SymbolSequence,
  setup: Setup,
  longestCodedBytes: number,
): BothEnds<EndCost> | undefined {
  const { alphabetSize } = setup;
  const stageBytes = rangeStateBytes(settings.rangeBits);
  let costs: BothEnds<EndCost> | undefined;
  eachTable(settings, sequence, setup, ({ table, nodes, symbolCount }) => {
    const nodeBytes = integerBytes(nodes - 1);
    const stringBytes = nodeBytes + integerBytes(alphabetSize) + integerBytes(symbolCount);
    const workBytes =
      nodes * stringBytes +
      slotsFor(nodes - settings.positions) * nodeBytes +
      2 * (nodes + table.symbols.length) * nodeBytes +
      TABLE_MODEL_BYTES +
      alphabetSize;
    const ramBytes = stageBytes + nodeBytes + staticTableBytes(table) + workBytes;
    const own = {
      encoder: endCost(0, ramBytes + longestCodedBytes, SENT_CODE.encoder),
      decoder: endCost(0, ramBytes, SENT_CODE.decoder),
    };
    costs = costs === undefined ? own : atBothEnds(costs, own, mostOf);
  });
  return costs;
}
