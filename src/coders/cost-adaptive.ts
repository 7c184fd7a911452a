import { BitWriter } from '../bits/bit-writer.ts';
import { BugError } from '../errors/errors.ts';
import { AdditiveModel } from '../models/additive-model.ts';
import { BackOffModel } from '../models/back-off-model.ts';
import type { ContextTree } from '../models/context-tree.ts';
import { CountingAdditive } from '../models/counting-additive.ts';
import { CountingBackOff } from '../models/counting-back-off.ts';
import { isFirstDirect, slotsFor, slottedNodes } from '../models/counting-contexts.ts';
import { levelsOf } from '../models/counting-sums.ts';
import { OperationTally } from '../models/counting-tally.ts';
import { CountingRange } from '../stages/counting-range.ts';
import { RangeEncoder } from '../stages/range-encoder.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { ArithSettings } from './arith-settings.ts';
import { adaptiveModelFor } from './arith-tables.ts';
import type { Setup } from './contract.ts';
import {
  type BothEnds,
  type CodeEstimate,
  type EndCost,
  type EndOperations,
  endCost,
  integerBytes,
} from './cost.ts';
import { rangeStateBytes } from './cost-static.ts';

/** Find the context, search, escape and exclude, count, halve, add, find the next contexts; a range coder's. */
const BACK_OFF_CODE: BothEnds<CodeEstimate> = {
  encoder: { statements: 180, nestedCalls: 5 },
  decoder: { statements: 200, nestedCalls: 5 },
};
/** Without escape and exclusion. */
const ADDITIVE_CODE: BothEnds<CodeEstimate> = {
  encoder: { statements: 120, nestedCalls: 5 },
  decoder: { statements: 130, nestedCalls: 5 },
};

/** How large a model is: nodes of its tree, those of them in slots, words of its runs, positions whose sums it keeps. */
export interface AdaptiveSize {
  readonly nodes: number;
  readonly slotted: number;
  readonly runWords: number;
  readonly positions: number;
}

/** What coding a unit came to. */
export interface AdaptivePass {
  readonly operations: EndOperations;
  /** The state that a unit, or each message, starts with. */
  readonly start: AdaptiveSize;
  /** The most of each that was reached. */
  readonly most: AdaptiveSize;
}

function modelFor(settings: ArithSettings, setup: Setup): BackOffModel | AdditiveModel {
  const model = adaptiveModelFor(settings, setup);
  if (model instanceof BackOffModel || model instanceof AdditiveModel) return model;
  throw new BugError('arith has an adaptive model of a kind whose operations are not counted');
}

/** Follows the contexts alone, which depend on symbols only. */
function contextsReached(
  tree: ContextTree,
  { symbols, messageEnds }: SymbolSequence,
  isReset: boolean,
): { nodes: number; slotted: number } {
  const startNodes = tree.nodeCount;
  const startSlotted = slottedNodes(tree, 0);
  let nodes = startNodes;
  let slotted = startSlotted;
  tree.start();
  let from = 0;
  const note = () => {
    nodes = Math.max(nodes, tree.nodeCount);
    slotted = Math.max(slotted, startSlotted + slottedNodes(tree, startNodes));
  };
  for (const to of messageEnds) {
    for (let i = from; i < to; i++) tree.advance(symbols[i]);
    from = to;
    if (!isReset) continue;
    note();
    tree.truncate(startNodes);
    tree.start();
  }
  note();
  return { nodes, slotted };
}

/**
 * Codes a unit and counts; see CountingBackOff and CountingAdditive. Two passes: contexts first, so that the slots have the
 * size that a device would give them.
 */
export function adaptivePass(
  settings: ArithSettings,
  sequence: SymbolSequence,
  setup: Setup,
): AdaptivePass {
  const { symbols, messageEnds, alphabetSize } = sequence;
  const isReset = setup.reset === 'message';
  const { order, rangeBits, added } = settings;
  const halveAt = settings.halveAt(alphabetSize);
  const model = modelFor(settings, setup);
  const { runs, sums } = model.learned();
  const start: AdaptiveSize = {
    nodes: runs.tree.nodeCount,
    slotted: slottedNodes(runs.tree, 0),
    runWords: runs.runWords,
    positions: sums?.count ?? 0,
  };
  const reached = contextsReached(runs.tree, sequence, isReset);
  const slots = slotsFor(reached.slotted);
  const encoder = new OperationTally();
  const decoder = new OperationTally();
  const counting =
    model instanceof BackOffModel
      ? new CountingBackOff(model, alphabetSize, order, halveAt, slots, encoder, decoder)
      : new CountingAdditive(model, alphabetSize, order, added!, halveAt, slots, encoder, decoder);
  const stage = new RangeEncoder(new BitWriter(), rangeBits);
  const sink = new CountingRange(stage, encoder, decoder);
  if (isReset) counting.markResetState();
  let { runWords, positions } = counting.size;
  let from = 0;
  for (const to of messageEnds) {
    if (isReset) counting.reset();
    stage.beginApart();
    counting.code(symbols, from, to, sink);
    from = to;
    const { size } = counting;
    runWords = Math.max(runWords, size.runWords);
    positions = Math.max(positions, size.positions);
  }
  return {
    operations: { encoder: encoder.counts(), decoder: decoder.counts() },
    start,
    most: { ...reached, runWords, positions },
  };
}

/** What a model of that size holds. */
interface AdaptiveBytes {
  /** Contexts and counts. */
  readonly tableBytes: number;
  /** Where it stands, and what is excluded. */
  readonly stateBytes: number;
}

/**
 * Bytes of a model, laid out as the present code has it, each integer as wide as its bound. `widths`: of the size that it may
 * grow to.
 *
 * - A context: its parent, its symbol with a flag, its one entry or the place of its run, the sum of its counts. An entry: symbol
 *   and count. Counts and sums are bounded by `halve_at`.
 * - Contexts of one symbol are found in a table by symbol, others in slots, a context number each. Runs take blocks of 4, 8, 16 …
 *   entries, the first of which holds their number; for each size the first block left free.
 * - The empty context (order 0 alone under additive counts), for each position met: by symbol the count and whether it was seen, and
 *   two trees of as many sums.
 * - With back-off: by symbol a stamp of 4 bytes, and the list of those excluded.
 */
function adaptiveBytes(
  settings: ArithSettings,
  alphabetSize: number,
  size: AdaptiveSize,
  widths: AdaptiveSize,
): AdaptiveBytes {
  const { order, positions, added } = settings;
  const halveAt = settings.halveAt(alphabetSize);
  const greatestSum =
    added === undefined ? Math.max(halveAt, 3 * alphabetSize) + 1 : Math.ceil(halveAt / added.q);
  const sumBytes = integerBytes(greatestSum);
  const symbolBytes = integerBytes(alphabetSize - 1);
  const levels = levelsOf(alphabetSize);
  const sumsBytes =
    alphabetSize * (sumBytes + 1) +
    2 ** levels * (sumBytes + integerBytes(alphabetSize)) +
    sumBytes +
    integerBytes(alphabetSize);
  const keepsSums = added === undefined || order === 0;
  const emptyBytes = keepsSums ? size.positions * sumsBytes : 0;
  const nodeBytes = integerBytes(widths.nodes - 1);
  if (order === 0) return { tableBytes: emptyBytes, stateBytes: integerBytes(positions - 1) };
  const entryBytes = symbolBytes + sumBytes;
  const placeBytes = integerBytes(widths.runWords);
  const contextBytes =
    nodeBytes + integerBytes(2 * alphabetSize + 1) + Math.max(entryBytes, placeBytes) + sumBytes;
  const finding = (isFirstDirect(positions) ? alphabetSize + 1 : 0) + slotsFor(widths.slotted);
  const excludedBytes = added === undefined ? alphabetSize * (4 + symbolBytes) : 0;
  return {
    tableBytes:
      (size.nodes - positions) * contextBytes +
      finding * nodeBytes +
      size.runWords * entryBytes +
      (levels + 1) * placeBytes +
      emptyBytes,
    stateBytes: (order + 1) * nodeBytes + integerBytes(alphabetSize) + excludedBytes,
  };
}

/**
 * Costs of an adaptive model on a range coder, for the most that the unit made it grow to: it grows with what is coded, so other
 * data can need more. Under `primed` the trained state lies in flash, and a reset copies it. A carry may run back to a
 * message's first byte, so the encoder holds its coded message.
 */
export function adaptiveCosts(
  settings: ArithSettings,
  setup: Setup,
  { start, most }: AdaptivePass,
  longestCodedBytes: number,
): BothEnds<EndCost> {
  const { alphabetSize } = setup;
  const grown = adaptiveBytes(settings, alphabetSize, most, most);
  const flashBytes =
    setup.policy === 'primed' ? adaptiveBytes(settings, alphabetSize, start, most).tableBytes : 0;
  const ramBytes = grown.tableBytes + grown.stateBytes + rangeStateBytes(settings.rangeBits);
  const code = settings.added === undefined ? BACK_OFF_CODE : ADDITIVE_CODE;
  return {
    encoder: endCost(flashBytes, ramBytes + longestCodedBytes, code.encoder),
    decoder: endCost(flashBytes, ramBytes, code.decoder),
  };
}
