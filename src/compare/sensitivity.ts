import { type Alternative, type ChoiceTerms, type Goal, pickAmong } from './choose-corpus.ts';
import { judge, type Limits, meetsAll, numericLimits, withLimit } from './limits.ts';
import { type CostTerms, yearlyCost } from './yearly-cost.ts';

/** A stretch of values of one limit or cost under which the same cell is picked. */
export interface Stretch {
  readonly from: number;
  readonly to: number;
  /** Absent: nothing meets the limits. */
  readonly pick?: string;
}

export interface Sensitivity {
  /** `max.flash_bytes`, `cost.units_per_day`, … */
  readonly key: string;
  /** As the plan has it. */
  readonly at: number;
  /** From half to twice that, in rising order; neighbours differ in their pick. */
  readonly stretches: readonly Stretch[];
}

const LEAST_FACTOR = 0.5;
const MOST_FACTOR = 2;

/** Joins neighbours of one pick. Values belong to the stretch that they begin, where the limit is a lower one to the one they end. */
function merged(
  points: readonly { from: number; to: number; pick: string | undefined }[],
): Stretch[] {
  const stretches: { from: number; to: number; pick?: string }[] = [];
  for (const { from, to, pick } of points) {
    const last = stretches.at(-1);
    if (last !== undefined && last.pick === pick) last.to = to;
    else stretches.push({ from, to, ...(pick === undefined ? {} : { pick }) });
  }
  return stretches;
}

/** How the pick changes as one numeric limit goes from half to twice its value: exactly, since it can change only at a cell's own figure. */
function limitSensitivity(
  alternatives: readonly Alternative[],
  goal: Goal,
  terms: ChoiceTerms,
  limits: Limits,
  { sense, key, limit }: ReturnType<typeof numericLimits>[number],
): Sensitivity {
  const [least, most] = [LEAST_FACTOR * limit, MOST_FACTOR * limit];
  const own = alternatives
    .map(({ figures }) => figures.of(key)?.value)
    .filter((value): value is number => value !== undefined && value > least && value < most);
  const bounds = [...new Set([least, ...own, most])].sort((a, b) => a - b);
  const pickAt = (value: number): string | undefined => {
    const changed = withLimit(limits, sense, key, value);
    const meeting = alternatives.filter(({ figures }) => meetsAll(judge(figures, changed)));
    return pickAmong(meeting, goal, terms).pick?.cell.id;
  };
  const points = bounds.slice(1).map((to, i) => {
    const from = bounds[i];
    // An upper limit takes in the figure that it reaches, a lower one that from which it falls.
    return { from, to, pick: pickAt(sense === 'max' ? from : to) };
  });
  return { key: `${sense}.${key}`, at: limit, stretches: merged(points) };
}

/** Costs that multiply what is sent alike for every cell, so that only the amount changes, and what the pick is at both ends. */
function costSensitivity(
  meeting: readonly Alternative[],
  goal: Goal,
  terms: ChoiceTerms,
  key: 'price_per_megabyte' | 'units_per_day' | 'devices',
  at: number,
): Sensitivity {
  const pickAt = (value: number): string | undefined => {
    const cost: CostTerms = { ...terms.cost, [key]: value };
    const repriced = meeting.map((a) => {
      const yearly = yearlyCost(a.cell, cost);
      return yearly === undefined ? a : { ...a, cost: yearly };
    });
    return pickAmong(repriced, goal, { ...terms, cost }).pick?.cell.id;
  };
  const [least, most] = [LEAST_FACTOR * at, MOST_FACTOR * at];
  const points = [
    { from: least, to: at, pick: pickAt(least) },
    { from: at, to: most, pick: pickAt(most) },
  ];
  return { key: `cost.${key}`, at, stretches: merged(points) };
}

/** Steps between half and twice the plan's that are tried at most; all of them where there are fewer. */
const MOST_STEPS = 256;

/** How the pick changes with the step in which the link bills; undefined where message lengths are not known for every step. */
function stepSensitivity(
  meeting: readonly Alternative[],
  goal: Goal,
  terms: ChoiceTerms,
  at: number,
): Sensitivity | undefined {
  const [least, most] = [Math.max(1, Math.ceil(LEAST_FACTOR * at)), MOST_FACTOR * at];
  const stride = Math.max(1, Math.ceil((most - least) / MOST_STEPS));
  const points: { from: number; to: number; pick: string | undefined }[] = [];
  for (let step = least; step <= most; step += stride) {
    const billed = meeting.map((alternative) => {
      const stepsPerUnit = alternative.figures.stepsPerUnit(step);
      const { cell } = alternative;
      if (stepsPerUnit === undefined || cell.billing === undefined) return undefined;
      const billing = { ...cell.billing, step_bytes: step, steps_per_unit: stepsPerUnit };
      return { ...alternative, cell: { ...cell, billing } };
    });
    if (billed.includes(undefined)) return undefined;
    const pick = pickAmong(billed as Alternative[], goal, terms).pick?.cell.id;
    points.push({ from: step, to: Math.min(most, step + stride), pick });
  }
  return { key: 'cost.bill_step_bytes', at, stretches: merged(points) };
}

/** How the pick changes as each limit and each cost goes from half to twice its value, the others kept. */
export function sensitivities(
  alternatives: readonly Alternative[],
  goal: Goal,
  terms: ChoiceTerms,
): Sensitivity[] {
  const { limits, cost } = terms;
  const meeting = alternatives.filter(({ meets }) => meets);
  const costs = (['price_per_megabyte', 'units_per_day', 'devices'] as const).flatMap((key) => {
    const at = cost[key];
    return at === undefined || goal !== 'yearly cost' ? [] : [{ key, at }];
  });
  const stepBytes = cost.bill_step_bytes;
  const step =
    stepBytes === undefined || goal !== 'yearly cost'
      ? undefined
      : stepSensitivity(meeting, goal, terms, stepBytes);
  return [
    ...numericLimits(limits).map((one) => limitSensitivity(alternatives, goal, terms, limits, one)),
    ...costs.map(({ key, at }) => costSensitivity(meeting, goal, terms, key, at)),
    ...(step === undefined ? [] : [step]),
  ];
}
