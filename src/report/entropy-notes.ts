import type { EntropyRecord } from '../harness/run-record.ts';
import { rateText } from './figures.ts';
import { countInText } from './paragraph.ts';

/** What the entropy screen says in sentences. Each function gives paragraphs, not yet broken into lines. */

/** Ceilings by name, lowest first, and those that there are not. */
export function ceilingNotes(entropy: EntropyRecord, noun: string): string[] {
  const notes: string[] = [];
  const reached = [...(entropy.ceilings ?? [])].sort((a, b) => a.rate - b.rate);
  if (reached.length > 0) {
    const list = reached.map(({ name, rate }) => `${name} ${rateText(rate)}`).join(', ');
    notes.push(`Ceilings, bits/${noun}, bounds that a verified decoder reaches: ${list}.`);
  }
  const byReason = new Map<string, string[]>();
  for (const { name, reason } of entropy.no_ceilings ?? []) {
    byReason.set(reason, [...(byReason.get(reason) ?? []), name]);
  }
  for (const [reason, names] of byReason) {
    notes.push(`No ceiling by ${names.join(', ')}: ${reason.replace(/\.$/, '')}.`);
  }
  return notes;
}

/** Why intervals may miss, and why orders are not estimable. */
export function validityNotes({ orders }: EntropyRecord): string[] {
  const notes: string[] = [];
  // Reasons that differ in figures only are said once, with those of the highest order.
  const byKind = new Map<string, { ks: number[]; reason: string }>();
  for (const { k, estimable, interval_trusted, interval_reason = 'see above' } of orders) {
    if (!estimable || interval_trusted !== false) continue;
    const kind = interval_reason.replace(/\d+/g, '');
    byKind.set(kind, { ks: [...(byKind.get(kind)?.ks ?? []), k], reason: interval_reason });
  }
  for (const { ks, reason } of byKind.values()) {
    notes.push(
      ks.length === 1
        ? `? Order ${ks[0]}: the interval may miss, ${reason}.`
        : `? Orders ${ks.join(', ')}: the intervals may miss, ${reason}.`,
    );
  }
  const first = orders.find((order) => !order.estimable);
  if (first !== undefined) {
    const higher = orders.filter((order) => order.k > first.k).length > 0;
    notes.push(
      `Order ${first.k}${higher ? ' and above are' : ' is'} not estimable: ${first.estimable_reason ?? 'too few symbols for its contexts'}. Such a figure says more about the length of these data than about their source.`,
    );
  }
  return notes;
}

/** Whether what coders reach contradicts the estimate. */
export function contradictionNotes({ floor, orders, ceilings }: EntropyRecord): string[] {
  if (!floor.cut) return [];
  const order = orders.find((o) => o.k === floor.order);
  const name = ceilings?.find((c) => c.rate === floor.high)?.name ?? 'a verified coder';
  const below = `${name} needs ${rateText(floor.high)}, below the corrected entropy of order ${floor.order}`;
  if (order?.low !== undefined && floor.high < order.low) {
    return [
      `${below} and below its whole interval: as a floor that estimate was wrong. Order ${floor.order} is not enough for this source.`,
    ];
  }
  return [`${below}: that order is not enough for this source.`];
}

/** How much data is needed. */
export function dataNotes(
  { resolution, training_sizes: training }: EntropyRecord,
  noun: string,
): string[] {
  const notes: string[] = [];
  if (training !== undefined) {
    const list = training.sizes
      .map(({ train_symbols, rate }) => `${countInText(train_symbols)}: ${rateText(rate)}`)
      .join(', ');
    const verdict =
      training.enough_symbols === undefined
        ? 'more training data still help'
        : `more than ${countInText(training.enough_symbols)} saves nothing worth having (less than its standard error, or than 0.001)`;
    notes.push(
      `Shipped tables of order ${training.order} by symbols trained on, ideal bits/${noun} on ${countInText(training.priced_symbols)} others: ${list}; ${verdict}.`,
    );
  }
  if (resolution !== undefined) {
    const pair = resolution.order === 0 ? 'equal lengths' : `order ${resolution.order - 1}`;
    notes.push(
      `A difference of ${rateText(resolution.difference, 3)} bits/${noun}, between candidates that vary as order ${resolution.order} does against ${pair}, is seen four times in five with ${countInText(roundUp(resolution.needed_symbols))} symbols to compare on; the ${countInText(resolution.symbols)} held out here resolve ${rateText(resolution.least_difference, 3)}.`,
    );
  }
  return notes;
}

/** Two significant digits, upwards: the error behind a needed size carries no more. */
function roundUp(count: number): number {
  if (count < 100) return count;
  const unit = 10 ** (Math.floor(Math.log10(count)) - 1);
  return Math.ceil(count / unit) * unit;
}

/** Further estimates of the rate, each named as one. */
export function furtherNotes(entropy: EntropyRecord, noun: string): string[] {
  const notes: string[] = [];
  const { match_length: matches, extrapolation } = entropy;
  if (matches !== undefined) {
    notes.push(
      matches.valid
        ? `Match lengths, an estimate: ${rateText(matches.rate)} bits/${noun} (${rateText(matches.low)} to ${rateText(matches.high)}), ${matches.reason}; ${rateText(matches.published)} before its bias is taken out. Flagged: that interval holds chance, not what is left of the bias, and may miss. LZ76 components, an estimate whose bias is left in: ${rateText(matches.lempel_ziv)}.`
        : `Match lengths give no estimate here: ${matches.reason}.`,
    );
  }
  if (extrapolation !== undefined) {
    notes.push(
      extrapolation.valid
        ? `Extrapolation of orders 0 to ${extrapolation.upto}, an estimate: ${rateText(extrapolation.rate)} bits/${noun}, ${extrapolation.reason}.`
        : `Extrapolation gives no estimate here: ${extrapolation.reason}.`,
    );
  }
  return notes;
}
