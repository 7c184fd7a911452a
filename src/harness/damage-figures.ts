import type { DamageExperiment } from './damage-experiment.ts';
import type { DamageOutcome } from './damage-outcome.ts';
import type { CellDamage } from './damage-schema.ts';

/** What stands in a record of the experiment itself. */
export function parametersOf(
  experiment: DamageExperiment,
): Pick<
  CellDamage,
  'kind' | 'seed' | 'probability' | 'good_to_bad' | 'bad_to_good' | 'lost_in_bad' | 'lost_in_good'
> {
  const { kind, seed } = experiment;
  if (experiment.kind !== 'lose_messages') return { kind, probability: experiment.chance, seed };
  const { law, isIndependent } = experiment;
  if (isIndependent) return { kind, probability: law.lostInGood, seed };
  return {
    kind,
    good_to_bad: law.goodToBad,
    bad_to_good: law.badToGood,
    lost_in_bad: law.lostInBad,
    lost_in_good: law.lostInGood,
    seed,
  };
}

/** What is counted over the damages of a kind. */
type Figures = Omit<CellDamage, keyof ReturnType<typeof parametersOf> | 'share' | 'unusable_share'>;

/**
 * Figures over all damages of a kind.
 * @param errors  flipped bits, lost bytes or lost messages in them
 */
export function figuresOf(outcomes: readonly DamageOutcome[], errors: number): Figures {
  const count = (verdict: DamageOutcome['verdict']): number =>
    outcomes.filter((outcome) => outcome.verdict === verdict).length;
  const recoveries = outcomes.map(({ recovery }) => recovery).filter((recovery) => recovery > 0);
  return {
    events: outcomes.length,
    errors,
    detected: count('detected'),
    by_check: count('by_check'),
    undetected: count('undetected'),
    harmless: count('harmless'),
    symbols_lost: spreadOf(outcomes.map(({ symbolsLost }) => symbolsLost)),
    ...(recoveries.length === 0 ? {} : { recovery: spreadOf(recoveries) }),
    messages_after: spreadOf(outcomes.map(({ messagesAfter }) => messagesAfter)),
  };
}

/** To a thousandth. */
const rounded = (value: number): number => Math.round(value * 1000) / 1000;

function spreadOf(counts: readonly number[]): CellDamage['messages_after'] {
  const n = counts.length;
  if (n === 0) return { mean: 0, mean_error: 0, p95: 0, max: 0 };
  const sorted = Float64Array.from(counts).sort();
  const mean = counts.reduce((sum, count) => sum + count, 0) / n;
  const squares = counts.reduce((sum, count) => sum + (count - mean) ** 2, 0);
  const error = n === 1 ? 0 : 1.96 * Math.sqrt(squares / (n - 1) / n);
  return {
    mean: rounded(mean),
    mean_error: rounded(error),
    p95: sorted[Math.ceil(0.95 * n) - 1],
    max: sorted[n - 1],
  };
}
