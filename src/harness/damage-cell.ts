import type { CodedInput, Setup } from '../coders/contract.ts';
import { decoderSetup } from '../coders/verify.ts';
import {
  BitassayError,
  BugError,
  CorruptStreamError,
  LimitError,
  PromiseError,
} from '../errors/errors.ts';
import { SeededGenerator } from '../statistics/generator.ts';
import { allArrive, LossProcess, lossRateOf } from '../statistics/gilbert-elliott.ts';
import { drawHits, hitShare } from '../statistics/rare-hits.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import { type Cell, decodesAlone } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import { type DamageExperiment, type DamagePlan, damageExperiments } from './damage-experiment.ts';
import { figuresOf, parametersOf } from './damage-figures.ts';
import { type DamageOutcome, damageOutcome } from './damage-outcome.ts';
import type { CellDamage } from './damage-schema.ts';
import {
  type Arrived,
  byteCountOf,
  inputOf,
  messageStretch,
  type Stretch,
  startBitOf,
  symbolStartOf,
  unharmed,
  wholeStretch,
  withFlips,
  withoutBytes,
  withoutMessages,
} from './damage-stretch.ts';
import { codeUnits } from './damage-units.ts';
import type { CodedUnit } from './run-cell.ts';

/** Most damages of one kind, most symbols that are decoded for it, and the fewest damages whatever they take. */
const MOST_EVENTS = 2000;
const MOST_SYMBOLS = 2 ** 22;
const FEWEST_EVENTS = 16;
/** Damages between two pauses. */
const PAUSE_EVENTS = 16;

/** Where a message of a cell lies. */
interface MessagePlace {
  readonly unit: number;
  /** Within its unit. */
  readonly index: number;
}

/**
 * Damages the coded messages of a cell, one damage at a time, and decodes them. A message that decodes alone is decoded so,
 * whatever else was coded: it is taken to arrive by itself, its beginning known. Else the unit up to the next reset is decoded,
 * with the damage in one message of it.
 *
 * The figures depend on the cell, its data and the plan's seed alone. Cost: for each kind of damage at most 2000 decodes, of
 * at most 2²² symbols in all unless 16 decodes take more.
 * @param pause       awaited now and then; may throw to stop
 * @param mostEvents  damages of each kind, at most
 * @throws PromiseError where a decoder throws what no decoder may, whatever its bytes; what coding and `pause` throw
 */
export async function damageCell(
  cell: Cell,
  corpus: CorpusData,
  plan: DamagePlan,
  pause: () => Promise<void>,
  mostEvents = MOST_EVENTS,
): Promise<CellDamage[]> {
  const damage = new DamagedCell(cell, await codeUnits(cell, corpus, pause), mostEvents);
  const figures: CellDamage[] = [];
  for (const experiment of damageExperiments(plan)) {
    const figure = await damage.simulate(experiment, pause);
    if (figure !== undefined) figures.push(figure);
  }
  return figures;
}

class DamagedCell {
  readonly #cell: Cell;
  readonly #units: readonly CodedUnit[];
  readonly #alone: boolean;
  readonly #places: readonly MessagePlace[];
  readonly #longest: number;
  readonly #mostEvents: number;

  constructor(cell: Cell, units: readonly CodedUnit[], mostEvents: number) {
    this.#cell = cell;
    this.#mostEvents = mostEvents;
    this.#units = units;
    this.#alone = decodesAlone(cell);
    this.#places = units.flatMap(({ messages }, unit) =>
      Array.from(messages.messageEnds, (_, index) => ({ unit, index })),
    );
    let longest = 0;
    for (const { messages } of units) {
      messages.messageEnds.forEach((end, i) => {
        longest = Math.max(longest, end - symbolStartOf(messages, i));
      });
    }
    this.#longest = longest;
  }

  /** Undefined where there is nothing to damage. */
  async simulate(
    experiment: DamageExperiment,
    pause: () => Promise<void>,
  ): Promise<CellDamage | undefined> {
    if (this.#places.length === 0) return undefined;
    const { kind, seed } = experiment;
    const { candidate, policy, reset } = this.#cell;
    const generator = new SeededGenerator([seed, kind, candidate.id, policy, reset].join('/'));
    const { share, sums } = this.#cumulatedShares(experiment);
    const total = sums[sums.length - 1];
    const outcomes: DamageOutcome[] = [];
    let errors = 0;
    if (total > 0) {
      this.#decodesUnharmed(this.#places[drawIndex(sums, generator)]);
      const count = this.#eventCount(experiment, sums);
      for (let event = 0; event < count; event++) {
        if (event % PAUSE_EVENTS === 0) await pause();
        const at = drawIndex(sums, generator);
        const happened =
          experiment.kind === 'lose_messages'
            ? this.#loseMessages(at, new LossProcess(experiment.law, generator))
            : this.#damageMessage(at, experiment.kind, experiment.chance, generator);
        errors += happened.errors;
        outcomes.push(happened.outcome);
      }
    }
    return {
      ...parametersOf(experiment),
      share,
      ...this.#unusable(experiment),
      ...figuresOf(outcomes, errors),
    };
  }

  /** Probabilities of messages to be damaged: their mean, and their running sums. */
  #cumulatedShares(experiment: DamageExperiment): { share: number; sums: Float64Array } {
    const sums = new Float64Array(this.#places.length);
    let sum = 0;
    this.#places.forEach(({ unit, index }, i) => {
      sum += this.#hitShare(this.#units[unit], index, experiment);
      sums[i] = sum;
    });
    if (experiment.kind !== 'lose_messages') return { share: sum / sums.length, sums };
    return { share: lossRateOf(experiment.law), sums };
  }

  #hitShare({ coded, messages }: CodedUnit, index: number, experiment: DamageExperiment): number {
    if (experiment.kind === 'lose_messages') return 1;
    const bits = coded.messageEndsBits[index] - startBitOf(coded, index);
    const stretch: Stretch = { ...coded, messages };
    const places = experiment.kind === 'flip' ? bits : byteCountOf(stretch, index);
    return hitShare(places, experiment.chance);
  }

  /** How many damages are simulated: fewer where each takes long to decode. */
  #eventCount({ kind }: DamageExperiment, sums: Float64Array): number {
    // Nothing needs to be decoded to know what is lost.
    if (kind === 'lose_messages' && this.#alone) return this.#mostEvents;
    let symbols = 0;
    this.#places.forEach(({ unit, index }, i) => {
      const { messages } = this.#units[unit];
      const weight = sums[i] - (i === 0 ? 0 : sums[i - 1]);
      const start = symbolStartOf(messages, index);
      symbols +=
        weight * (this.#alone ? messages.messageEnds[index] - start : messages.symbols.length);
    });
    const mean = symbols / sums[sums.length - 1];
    const affordable = Math.floor(MOST_SYMBOLS / Math.max(1, mean));
    return Math.min(this.#mostEvents, Math.max(FEWEST_EVENTS, affordable));
  }

  #stretchOf({ unit, index }: MessagePlace): { stretch: Stretch; index: number } {
    const coded = this.#units[unit];
    if (this.#alone) return { stretch: messageStretch(coded, index), index: 0 };
    return { stretch: wholeStretch(coded), index };
  }

  #damageMessage(
    at: number,
    kind: 'flip' | 'lose_bytes',
    chance: number,
    generator: SeededGenerator,
  ): { outcome: DamageOutcome; errors: number } {
    const place = this.#places[at];
    const { setup } = this.#units[place.unit];
    const { stretch, index } = this.#stretchOf(place);
    const bits = stretch.messageEndsBits[index] - startBitOf(stretch, index);
    const places = kind === 'flip' ? bits : byteCountOf(stretch, index);
    const hits = drawHits(places, chance, generator);
    const arrived =
      kind === 'flip'
        ? withFlips(stretch, index, hits)
        : withoutBytes(stretch, index, hits, setup.lengths, setup.align);
    const decoded = this.#decode(setup, stretch, arrived);
    const outcome = damageOutcome(stretch.messages, decoded, { from: index, to: index + 1 });
    return { outcome, errors: hits.length };
  }

  /** A run of lost messages, at most to the end of the data. */
  #loseMessages(at: number, losses: LossProcess): { outcome: DamageOutcome; errors: number } {
    const errors = losses.drawRun(this.#places.length - at);
    const place = this.#places[at];
    const last = this.#places[at + errors - 1];
    const { messages, setup } = this.#units[last.unit];
    const from = last.unit === place.unit ? place.index : 0;
    const to = last.index + 1;
    // Units before the last are lost to their end; those between whole.
    let before = 0;
    for (let unit = place.unit; unit < last.unit; unit++) {
      const lost = this.#units[unit].messages;
      const start = unit === place.unit ? symbolStartOf(lost, place.index) : 0;
      before += lost.symbols.length - start;
    }
    const goesOn = !this.#alone && to < messages.messageEnds.length;
    let outcome: DamageOutcome;
    if (goesOn) {
      const stretch = wholeStretch(this.#units[last.unit]);
      const decoded = this.#decode(setup, stretch, withoutMessages(stretch, from, to));
      outcome = damageOutcome(messages, decoded, { from, to, missing: true });
    } else {
      const lost = symbolStartOf(messages, to) - symbolStartOf(messages, from);
      outcome = { verdict: 'undetected', symbolsLost: lost, recovery: lost, messagesAfter: 0 };
    }
    const { symbolsLost, recovery } = outcome;
    return {
      outcome: { ...outcome, symbolsLost: before + symbolsLost, recovery: before + recovery },
      errors,
    };
  }

  /** The symbols, or undefined where the decoder stops with one of the errors that it may. */
  #decode(setup: Setup, { messages }: Stretch, arrived: Arrived): SymbolSequence | undefined {
    const input: CodedInput = inputOf(arrived, setup.lengths);
    // A receiver knows how long messages become; it cannot know how many symbols a damaged one holds.
    const maxSymbols = this.#alone ? this.#longest : messages.symbols.length + this.#longest;
    const { candidate } = this.#cell;
    try {
      const decoder = candidate.create().decoder(decoderSetup(setup), { maxSymbols });
      return decoder.decode(input).sequence;
    } catch (error) {
      if (error instanceof CorruptStreamError || error instanceof LimitError) return undefined;
      const text =
        error instanceof BitassayError || error instanceof Error
          ? `${error.name}: ${error.message}`
          : 'something that is no error';
      throw new PromiseError(`the decoder of ${candidate.id} broke on damaged bytes`, {
        coder: candidate.id,
        expected: 'a CorruptStreamError or a LimitError, or symbols, whatever the bytes',
        got: text,
      });
    }
  }

  /** The experiment itself must change nothing where there is no damage. */
  #decodesUnharmed(place: MessagePlace): void {
    const { stretch, index } = this.#stretchOf(place);
    const decoded = this.#decode(this.#units[place.unit].setup, stretch, unharmed(stretch));
    const outcome = damageOutcome(stretch.messages, decoded, { from: index, to: index + 1 });
    if (outcome.verdict !== 'harmless')
      throw new BugError(`a message of ${this.#cell.id} does not decode as it was cut out`);
  }

  /** Share of messages lost or spoiled if a loss spoils all messages up to the next reset. */
  #unusable(experiment: DamageExperiment): Pick<CellDamage, 'unusable_share'> {
    if (experiment.kind !== 'lose_messages') return {};
    const { law } = experiment;
    if (this.#alone) return { unusable_share: lossRateOf(law) };
    const most = this.#units.reduce(
      (a, { messages }) => Math.max(a, messages.messageEnds.length),
      0,
    );
    const arrive = allArrive(law, most);
    let unusable = 0;
    for (const { messages } of this.#units)
      for (let i = 1; i <= messages.messageEnds.length; i++) unusable += 1 - arrive[i];
    return { unusable_share: unusable / this.#places.length };
  }
}

/** An index, each with a probability as large as its part of the running sums. */
function drawIndex(sums: Float64Array, generator: SeededGenerator): number {
  const drawn = generator.real() * sums[sums.length - 1];
  let low = 0;
  let high = sums.length - 1;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (sums[middle] > drawn) high = middle;
    else low = middle + 1;
  }
  return low;
}
