import { addSteps, evenCounts, type OperationCounts } from '../models/counting-tally.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Coder, Setup, Tables } from './contract.ts';
import {
  addOperations,
  atBothEnds,
  type BothEnds,
  type EndCost,
  type EndOperations,
  extraCost,
  mostOf,
  sumOf,
} from './cost.ts';
import { messagesWhere, ownersOf } from './table-set-messages.ts';

/** Least bits so far and the table that gave them. */
const CHOICE_BYTES = 4 + 1;
/** The loop over tables, the comparison, the selector; the selector and its test. */
const CHOICE_STATEMENTS = { encoder: 10, decoder: 4 };

/**
 * The flash of all tables, the code once, and the RAM of the table that takes most; with several tables the choice beside it.
 */
export function tableSetCosts(
  coder: Coder,
  setup: Setup,
  sets: readonly Tables[],
  longestCodedBytes: number,
  sequence: SymbolSequence,
): BothEnds<EndCost> | undefined {
  let costs: BothEnds<EndCost> | undefined;
  for (const tables of sets) {
    const own = coder.costs?.({ ...setup, tables }, longestCodedBytes, sequence);
    if (own === undefined) return undefined;
    costs = costs === undefined ? own : atBothEnds(costs, own, besides);
  }
  if (costs === undefined || sets.length === 1) return costs;
  return atBothEnds(
    costs,
    {
      encoder: extraCost(0, CHOICE_BYTES, CHOICE_STATEMENTS.encoder),
      decoder: extraCost(0, 0, CHOICE_STATEMENTS.decoder),
    },
    sumOf,
  );
}

const besides = (a: EndCost, b: EndCost): EndCost => ({
  ...mostOf(a, b),
  flashBytes: a.flashBytes + b.flashBytes,
});

/**
 * The encoder codes each message with every table, tests after each whether it is the shortest, and codes it once more with
 * that; the decoder reads each with its own, after a test of the selector. The tests are booked on one symbol of a message.
 */
export function tableSetOperations(
  coder: Coder,
  sequence: SymbolSequence,
  setup: Setup,
  sets: readonly Tables[],
): EndOperations | undefined {
  if (coder.operations === undefined) return undefined;
  const owners = ownersOf(coder, { ...setup, align: 1 }, sets, sequence);
  let tried: OperationCounts | undefined;
  let coded: EndOperations | undefined;
  for (const [table, tables] of sets.entries()) {
    const inner = { ...setup, tables };
    const isAll = sets.length === 1;
    const own = coder.operations(
      isAll ? sequence : messagesWhere(sequence, (i) => owners[i] === table),
      inner,
    );
    if (own === undefined) return undefined;
    coded = coded === undefined ? own : addOperations(coded, own);
    if (isAll) continue;
    const all = coder.operations(sequence, inner);
    if (all === undefined) return undefined;
    tried = tried === undefined ? all.encoder : addSteps(tried, all.encoder);
  }
  if (coded === undefined || tried === undefined) return coded;
  const tests = (each: number): OperationCounts => {
    const { symbolCount, worst } = evenCounts(sequence.symbols.length, { branches: each });
    const total = evenCounts(owners.length, { branches: each }).total;
    return { symbolCount, total, worst };
  };
  return {
    encoder: addSteps(addSteps(tried, coded.encoder), tests(sets.length)),
    decoder: addSteps(coded.decoder, tests(1)),
  };
}
