import type { FieldPlan } from '../models/field-plan.ts';
import { LINEAR } from '../models/field-residual.ts';
import type { RangeBits } from '../stages/range-precision.ts';
import type { Setup } from './contract.ts';
import {
  atBothEnds,
  type BothEnds,
  type CodeEstimate,
  type EndCost,
  endCost,
  sumOf,
} from './cost.ts';
import { FIELDS_EXTRAS, MEASURED, measuredCosts } from './cost-measured.ts';
import { rangeStateBytes } from './cost-static.ts';
import { fieldPlanArrays, fieldShape, flashBytesOf } from './fields-arrays.ts';

/** Take apart or put together, transform, context, token and extra bits, counts where they adapt; a range coder's. */
const FIELDS_CODE: BothEnds<CodeEstimate> = {
  encoder: { statements: 90, nestedCalls: 4 },
  decoder: { statements: 94, nestedCalls: 4 },
};
const ADAPTING_STATEMENTS = 16;

/** A sum over inputs, and its place among the weights. */
const LINEAR_STATEMENTS = 14;

/** An integer a part each: value, value before, the one before that where it is asked, size of the residual. */
function partStateBytes(plan: FieldPlan): number {
  const { delta2, linear } = fieldShape(plan);
  return 4 * plan.partCount * (delta2 || linear !== 'none' ? 4 : 3);
}

/** As exported; see `cost-measured.ts`. */
function exportedCosts(plan: FieldPlan, { lengths }: Setup, flashBytes: number): BothEnds<EndCost> {
  const { classes, beside, reversed, delta2, linear } = fieldShape(plan);
  const extras = [
    ...(classes ? [FIELDS_EXTRAS.classes] : []),
    ...(beside ? [FIELDS_EXTRAS.beside] : []),
    ...(reversed ? [FIELDS_EXTRAS.reversed] : []),
    ...(delta2 ? [FIELDS_EXTRAS.delta2] : []),
    ...(linear === 'none' ? [] : [FIELDS_EXTRAS.linear]),
    ...(linear === 'wide' ? [FIELDS_EXTRAS.wide] : []),
  ];
  const parts: EndCost = { flashBytes: 0, codeBytes: 0, ramBytes: partStateBytes(plan) };
  const form = measuredCosts(MEASURED.fields, lengths, {
    encoder: flashBytes,
    decoder: flashBytes,
  });
  return [{ encoder: parts, decoder: parts }, ...extras].reduce<BothEnds<EndCost>>(
    (cost, extra) => atBothEnds(cost, extra, sumOf),
    form,
  );
}

/**
 * Costs of `fields`.
 *
 * `shipped`: how each part is coded (fields-arrays.ts), and one lower end of 2 bytes a token of a table; a frequency is the
 * distance to the next. With a range of 32 bits code and RAM are those of the exported form. `learned`, `primed`: a count of 2
 * bytes a token and a total of 2 bytes a table in RAM, and under `primed` the same in flash, to start from. Where nothing is
 * exported, a carry may run back to a message's first byte, so the encoder holds its coded message. The record itself is the
 * caller's.
 */
export function fieldsCosts(
  plan: FieldPlan,
  setup: Setup,
  bits: RangeBits,
  longestCodedBytes: number,
): BothEnds<EndCost> {
  const { policy } = setup;
  const adapts = policy !== 'shipped';
  const countBytes = 2 * (plan.slotCount + plan.tableCount);
  const tableBytes = policy === 'learned' ? 0 : adapts ? countBytes : 2 * plan.slotCount;
  const flashBytes = flashBytesOf(fieldPlanArrays(plan)) + tableBytes;
  if (!adapts && bits === 32) return exportedCosts(plan, setup, flashBytes);
  // The last byte tells how many records lie before.
  const stateBytes = rangeStateBytes(bits) + partStateBytes(plan) + 1 + (adapts ? countBytes : 0);
  const code = ({ statements, nestedCalls }: CodeEstimate): CodeEstimate => ({
    statements:
      statements +
      (adapts ? ADAPTING_STATEMENTS : 0) +
      (plan.transforms.includes(LINEAR) ? LINEAR_STATEMENTS : 0),
    nestedCalls,
  });
  return {
    encoder: endCost(flashBytes, stateBytes + longestCodedBytes, code(FIELDS_CODE.encoder)),
    decoder: endCost(flashBytes, stateBytes, code(FIELDS_CODE.decoder)),
  };
}
