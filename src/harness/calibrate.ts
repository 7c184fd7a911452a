import { driftOf } from '../entropy/drift.ts';
import { entropyByOrder } from '../entropy/entropy-by-order.ts';
import { matchLengthEntropy } from '../entropy/match-lengths.ts';
import { InputError } from '../errors/errors.ts';
import { nearestWord } from '../errors/nearest.ts';
import { oneMessage } from '../symbols/sequence.ts';
import { coderLines } from './calibrate-coders.ts';
import { SourceTally } from './calibrate-intervals.ts';
import type {
  CalibrationRecord,
  ChangeLine,
  CoderLine,
  EstimatorLine,
  IntervalLine,
} from './calibrate-record.ts';
import type { CalibrationSource } from './calibrate-source.ts';
import { calibrationSource, calibrationSourceNames } from './calibrate-sources.ts';
import { judgeChange } from './calibrate-verdicts.ts';
import { toolVersion } from './environment.ts';
import { Interrupted, pauseWith, type RunHooks } from './pause.ts';

/** All stretches are drawn from this, the source's name, the length and the number of the repetition. */
const CALIBRATION_SEED = 'bitassay calibrate, stretches, 1';

/** The seed of one stretch. */
export function stretchSeed(source: string, symbolCount: number, repetition: number): string {
  return `${CALIBRATION_SEED}, ${source}, ${symbolCount}, ${repetition}`;
}

/** Lengths at which sources are drawn: all, and those of a rough calibration. */
export const CALIBRATION_SIZES: readonly number[] = [1e3, 1e4, 1e5, 1e6, 1e7];
export const ROUGH_SIZES: readonly number[] = [1e3, 1e4];

const ROUGH_REPETITIONS = 60;
/** Repetitions in which the further estimators and the test for changes are run too. */
const FURTHER_REPETITIONS = 20;
/** Above this many symbols, match lengths and coders would take most of the time and are left out. */
const MOST_FOR_MATCHES = 1e5;
const MOST_FOR_CODERS = 1e6;
/** Orders above the source's own that are looked at. */
const ORDERS_ABOVE = 2;
const MOST_ORDER = 8;
/** Above this many symbols in the alphabet only one further order is. */
const LARGE_ALPHABET = 256;

export interface CalibrationPlan {
  /** Names of sources; all of them where empty. */
  readonly sources: readonly string[];
  readonly sizes: readonly number[];
  readonly rough: boolean;
}

/** How often a source is drawn at a length. */
export function repetitionsAt(symbolCount: number, rough: boolean): number {
  if (symbolCount > 1e6) return 1;
  if (symbolCount > 1e5) return 20;
  return rough ? ROUGH_REPETITIONS : 200;
}

/** The sources of those names. Throws InputError with the nearest name. */
export function calibrationSources(names: readonly string[]): CalibrationSource[] {
  return (names.length === 0 ? calibrationSourceNames : [...new Set(names)]).map((name) => {
    const source = calibrationSource(name);
    if (source !== undefined) return source;
    const near = nearestWord(name, calibrationSourceNames);
    throw new InputError(`there is no source named ${JSON.stringify(name)}`, {
      expected: `one of ${calibrationSourceNames.join(', ')}`,
      ...(near === undefined ? {} : { advice: `Did you mean ${near}?` }),
    });
  });
}

/** The highest order that is looked at. */
export function highestOrder(source: CalibrationSource): number {
  if (source.order === undefined) return MOST_ORDER;
  const above = source.alphabetSize >= LARGE_ALPHABET ? 1 : ORDERS_ABOVE;
  return Math.min(MOST_ORDER, source.order + above);
}

/**
 * Draws sources whose entropies are known by calculation, asks the estimators and coders about them, and judges each
 * answer against the truth. The same plan gives the same record on every machine.
 *
 * An interrupt keeps what is done, the repetitions of the line in hand included.
 * @throws InputError for an unknown source
 */
export async function runCalibration(
  plan: CalibrationPlan,
  hooks: RunHooks = {},
): Promise<CalibrationRecord> {
  const sources = calibrationSources(plan.sources);
  const intervals: IntervalLine[] = [];
  const estimators: EstimatorLine[] = [];
  const coders: CoderLine[] = [];
  const changes: ChangeLine[] = [];
  let partial = false;
  let symbolsDone = 0;
  let current = '';
  const symbolsTotal = plan.sizes.reduce(
    (sum, size) => sum + size * repetitionsAt(size, plan.rough) * sources.length,
    0,
  );
  const pause = pauseWith(hooks, () => ({
    cellsDone: Math.round(symbolsDone / 1000),
    cellsTotal: Math.round(symbolsTotal / 1000),
    current,
  }));

  const calibrate = async (source: CalibrationSource, size: number): Promise<void> => {
    const repetitions = repetitionsAt(size, plan.rough);
    const tally = new SourceTally(source, size);
    let found = 0;
    let tested = 0;
    try {
      for (let repetition = 0; repetition < repetitions; repetition++) {
        await pause();
        const symbols = source.draw(size, stretchSeed(source.name, size, repetition));
        const sequence = oneMessage(symbols, source.alphabetSize);
        const further = repetition < FURTHER_REPETITIONS;
        if (source.stationary) {
          const entropy = entropyByOrder(sequence, {
            upto: highestOrder(source),
            contexts: 'running',
            all: further,
          });
          const matched = further && size <= MOST_FOR_MATCHES;
          tally.add(entropy, matched ? matchLengthEntropy(sequence, entropy) : undefined);
        }
        if (further) {
          const { tests, change } = driftOf(sequence, { contexts: 'running' });
          if (tests.some((test) => test.found !== undefined)) tested++;
          if (change !== undefined) found++;
        }
        if (repetition === 0 && size <= MOST_FOR_CODERS) {
          coders.push(...(await coderLines(source, symbols, pause)));
        }
        symbolsDone += size;
      }
    } finally {
      intervals.push(...tally.intervalLines());
      estimators.push(...tally.estimatorLines());
      if (tested > 0) {
        changes.push({
          source: source.name,
          symbol_count: size,
          changes: !source.stationary,
          repetitions: tested,
          found,
          ...judgeChange(!source.stationary, found, tested),
        });
      }
    }
  };

  try {
    for (const size of plan.sizes) {
      for (const source of sources) {
        current = `${source.name}, ${size} symbols`;
        await calibrate(source, size);
      }
    }
  } catch (error) {
    if (!(error instanceof Interrupted)) throw error;
    partial = true;
  }
  const broken = [...intervals, ...coders, ...changes].filter((l) => l.verdict === 'misses').length;
  return {
    calibration: 1,
    tool: toolVersion(),
    seed: CALIBRATION_SEED,
    sources: sources.map(({ name, description, alphabetSize, order, rate }) => ({
      name,
      description,
      alphabet_size: alphabetSize,
      ...(order === undefined ? {} : { order }),
      ...(rate === undefined ? {} : { rate: { ...rate } }),
    })),
    intervals,
    estimators,
    coders,
    changes,
    broken,
    partial,
  };
}
