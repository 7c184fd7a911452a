import type { PlanFile } from '../corpus/plan-schema.ts';
import { independentLosses, type LossLaw } from '../statistics/gilbert-elliott.ts';

/** What a plan asks of damage, as it is written there. */
export type DamagePlan = NonNullable<PlanFile['damage']>;

/** One kind of damage with its parameters. */
export type DamageExperiment = { readonly seed: number } & (
  | { readonly kind: 'flip' | 'lose_bytes'; readonly chance: number }
  | { readonly kind: 'lose_messages'; readonly law: LossLaw; readonly isIndependent: boolean }
);

const USUAL_SEED = 1;

/** The losses that a plan means: in the good state none, in the bad all, unless it says so. */
function lossLawOf(written: NonNullable<DamagePlan['lose_messages']>): LossLaw {
  if (typeof written === 'number') return independentLosses(written);
  const { good_to_bad, bad_to_good, lost_in_bad = 1, lost_in_good = 0 } = written;
  return {
    goodToBad: good_to_bad,
    badToGood: bad_to_good,
    lostInBad: lost_in_bad,
    lostInGood: lost_in_good,
  };
}

/** Each kind of damage that a plan asks for, an experiment of its own. */
export function damageExperiments(plan: DamagePlan): DamageExperiment[] {
  const { flip, lose_bytes, lose_messages, seed = USUAL_SEED } = plan;
  return [
    ...(flip === undefined ? [] : [{ kind: 'flip', chance: flip, seed } as const]),
    ...(lose_bytes === undefined
      ? []
      : [{ kind: 'lose_bytes', chance: lose_bytes, seed } as const]),
    ...(lose_messages === undefined
      ? []
      : [
          {
            kind: 'lose_messages',
            law: lossLawOf(lose_messages),
            isIndependent: typeof lose_messages === 'number',
            seed,
          } as const,
        ]),
  ];
}
