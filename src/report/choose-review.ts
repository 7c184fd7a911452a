import type { Alternative, CorpusChoice, Goal } from '../compare/choose-corpus.ts';
import type { LimitVerdict } from '../compare/limits.ts';
import type { Sensitivity } from '../compare/sensitivity.ts';
import type { RunRecord } from '../harness/run-record.ts';
import { countText, rateText, symbolNoun } from './figures.ts';
import { cellPhrase, entropyOf } from './floor-lines.ts';

/** A number with as many digits as a reader can use. */
export function figureText(value: number): string {
  if (!Number.isFinite(value)) return 'unbounded';
  if (Math.abs(value) >= 1000) return countText(value);
  return String(Number(value.toPrecision(3)));
}

const WORDS: Readonly<Record<string, string>> = {
  rate: 'bits per symbol',
  flash_bytes: 'flash bytes',
  ram_bytes: 'RAM bytes',
  code_bytes: 'code bytes',
  cycles_per_symbol: 'cycles per symbol',
  message_bytes_mean: 'bytes of a message, mean',
  message_bytes_p50: 'bytes of a message, median',
  message_bytes_p95: 'bytes of a message, 95 %',
  message_bytes_p99: 'bytes of a message, 99 %',
  message_bytes_max: 'bytes of a message, largest',
  encode_speed: 'encode speed',
  decode_speed: 'decode speed',
  units_per_message: 'units per message',
  exports: 'exports as',
  reset: 'reset, no rarer than',
};

/** `max.flash_bytes` in words. */
export function limitWords(key: string): string {
  const name = key.slice(key.indexOf('.') + 1);
  return WORDS[name] ?? name.replaceAll('_', ' ');
}

/** A figure, and its interval where it has one. */
export function withInterval({
  value,
  low,
  high,
}: Pick<LimitVerdict, 'value' | 'low' | 'high'>): string {
  if (value === undefined) return 'not known';
  if (typeof value === 'string') return value;
  if (low === undefined || high === undefined) return figureText(value);
  return `${figureText(value)} (${figureText(low)} to ${figureText(high)})`;
}

function goalText(
  { cell, figures, cost }: Alternative,
  goal: Goal,
  noun: string,
  currency: string,
): string {
  const rate = figures.of('rate');
  const parts: string[] = [];
  if (goal === 'yearly cost' && cost !== undefined)
    parts.push(`${figureText(cost.cost)} ${currency} a year`);
  const units = figures.of('units_per_message');
  if (units !== undefined) parts.push(`${withInterval(units)} units per message`);
  if (rate !== undefined) parts.push(`${withInterval(rate)} bits per ${noun}`);
  return `${cellPhrase(cell)}: ${parts.join(', ')}`;
}

/** The verdict with the least room: what breaks first. */
function tightest(verdicts: readonly LimitVerdict[]): LimitVerdict | undefined {
  return verdicts
    .filter(({ margin }) => margin !== undefined)
    .toSorted((a, b) => a.margin! - b.margin!)[0];
}

function limitsText(pick: Alternative): string {
  const { verdicts } = pick;
  if (verdicts.length === 0) return 'The plan sets no limits.';
  const near = tightest(verdicts);
  const open = verdicts.filter(({ certain }) => !certain).map(({ key }) => limitWords(key));
  const nearest =
    near === undefined
      ? ''
      : `; least room: ${limitWords(near.key)}, ${withInterval(near)} of ${figureText(Number(near.limit))}, ${Math.round(100 * near.margin!)} %`;
  const certainty =
    open.length === 0
      ? 'none of their intervals reaches its limit'
      : `these data leave open: ${open.join(', ')}`;
  return `All ${verdicts.length} limits are met${nearest}; ${certainty}.`;
}

function floorText(record: RunRecord, pick: Alternative, noun: string): string {
  const floor = entropyOf(record, pick.cell)?.floor;
  if (floor === undefined) return 'No floor was estimated.';
  const over = pick.cell.rate! - floor.point;
  return `Floor, an estimate: ${rateText(floor.point)} bits per ${noun}, band ${rateText(floor.low)} to ${rateText(floor.high)}; the pick lies ${rateText(Math.abs(over))} ${over < 0 ? 'below' : 'above'} it.`;
}

/** What would change the pick between half and twice each limit and cost, in half a line. */
function changesText(sensitivities: readonly Sensitivity[], pick: string): string {
  const moved = sensitivities.filter(({ stretches }) => stretches.some((s) => s.pick !== pick));
  if (sensitivities.length === 0)
    return 'Nothing to change: the plan sets neither limits nor costs.';
  if (moved.length === 0)
    return 'The pick stays while any one limit or cost goes from half to twice its value.';
  return `The pick changes within half to twice of ${moved.map(({ key }) => limitWords(key)).join(', ')}; see below.`;
}

/** Five lines that can be pasted in a review. */
export function reviewLines(
  record: RunRecord,
  choice: CorpusChoice,
  sensitivities: readonly Sensitivity[],
): string[] {
  const { pick, runnerUp, goal, tiedWith } = choice;
  if (pick === undefined) return [];
  const corpus = record.corpora.find(({ name }) => name === choice.corpus)!;
  const noun = symbolNoun(corpus.symbols_as);
  const currency = record.plan.cost?.currency ?? 'in the plan’s currency';
  const tied =
    tiedWith.length === 0
      ? ''
      : ` (${tiedWith.length} more cannot be told from it on these data; it takes least memory)`;
  return [
    `Ship ${goalText(pick, goal, noun, currency)}${tied}.`,
    runnerUp === undefined
      ? 'No other cell meets the limits.'
      : `Next: ${goalText(runnerUp, goal, noun, currency)}.`,
    limitsText(pick),
    floorText(record, pick, noun),
    changesText(sensitivities, pick.cell.id),
  ];
}
