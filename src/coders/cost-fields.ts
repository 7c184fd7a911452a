import {
  BOUNDS,
  EARLIER_VALUE,
  type FieldPlan,
  LAST_VALUE,
  VALUE_BEFORE,
} from '../models/field-plan.ts';
import { LINEAR } from '../models/field-residual.ts';
import type { RangeBits } from '../stages/range-precision.ts';
import type { TablePolicy } from './contract.ts';
import { type BothEnds, type CodeEstimate, type EndCost, endCost, integerBytes } from './cost.ts';
import { rangeStateBytes } from './cost-static.ts';

/** Take apart or put together, transform, context, token and extra bits, counts where they adapt; a range coder's. */
const FIELDS_CODE: BothEnds<CodeEstimate> = {
  encoder: { statements: 90, nestedCalls: 4 },
  decoder: { statements: 94, nestedCalls: 4 },
};
const ADAPTING_STATEMENTS = 16;

/** A sum over inputs, and its place among the weights. */
const LINEAR_STATEMENTS = 14;

/** An integer a part each: value, residual, value before, the one before that, residual before. */
const PART_STATE_BYTES = 5 * 4;

/** Parts whose values are put in size classes: their bounds are kept. */
function classedParts({ contexts, contextParts }: FieldPlan): Set<number> {
  const kinds = [LAST_VALUE, EARLIER_VALUE, VALUE_BEFORE];
  return new Set([...contextParts].filter((_, part) => kinds.includes(contexts[part])));
}

/**
 * Bytes that describe the parts of a record, the same at both ends. For each part: width and sign (1 byte), place in the record
 * in bits, transform and context (1), the part asked, its first table, the value before the first in as many bytes as the
 * width needs, where any is coded so the part beside which a first value is; where a context asks for its class, the bounds.
 * Once a table, and once more: its first slot. Under `linear` besides the number of inputs (1), which they are, and 2 bytes a
 * weight.
 */
function fieldPlanBytes(plan: FieldPlan): number {
  const { layout, partCount, tableCount, slotCount, transforms, inputStart, weightStart } = plan;
  const nameBytes = integerBytes(partCount - 1);
  const partBytes =
    2 +
    integerBytes(8 * layout.bytes - 1) +
    nameBytes +
    (plan.firstParts.some((beside) => beside >= 0) ? integerBytes(partCount) : 0) +
    integerBytes(tableCount - 1);
  let bytes = (tableCount + 1) * integerBytes(slotCount) + partCount * partBytes;
  for (const part of classedParts(plan)) bytes += BOUNDS * integerBytes(2 ** layout.widths[part]);
  for (let part = 0; part < partCount; part++) {
    bytes += integerBytes(2 ** layout.widths[part] - 1);
    if (transforms[part] === LINEAR)
      bytes +=
        1 +
        nameBytes * (inputStart[part + 1] - inputStart[part]) +
        2 * (weightStart[part + 1] - weightStart[part]);
  }
  return bytes;
}

/**
 * Costs of `fields`.
 *
 * `shipped`: one lower end of 2 bytes a slot; a frequency is the distance to the next. `learned`, `primed`: a count of 2 bytes
 * a slot and a total of 2 bytes a table in RAM, and under `primed` the same in flash, to start from. A carry may run back to a
 * message's first byte, so the encoder holds its coded message. The record itself is the caller's.
 */
export function fieldsCosts(
  plan: FieldPlan,
  policy: TablePolicy,
  bits: RangeBits,
  longestCodedBytes: number,
): BothEnds<EndCost> {
  const adapts = policy !== 'shipped';
  const countBytes = 2 * (plan.slotCount + plan.tableCount);
  const tableBytes = policy === 'learned' ? 0 : adapts ? countBytes : 2 * plan.slotCount;
  const flashBytes = fieldPlanBytes(plan) + tableBytes;
  // The last byte tells how many records lie before.
  const stateBytes =
    rangeStateBytes(bits) + plan.partCount * PART_STATE_BYTES + 1 + (adapts ? countBytes : 0);
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
