import { bitAccount } from '../account/bit-account.ts';
import type { FieldPrice } from '../coders/contract.ts';
import { bcaMean } from '../statistics/bca.ts';
import { type BillingFigures, billingFigures } from './billing.ts';
import { decodesAlone } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import type { CorpusFloors } from './corpus-floors.ts';
import { costRecord } from './cost-figures.ts';
import { bitsOfCorpusMessages, type FillFigures, fillFigures } from './fill-figures.ts';
import { type LossFigures, lossFigures } from './loss.ts';
import type { CellBits, CellFailure } from './run-cell.ts';
import type { CellRecord } from './run-record.ts';
import type { Speed } from './speed.ts';

function quantile(sorted: Float64Array, share: number): number {
  return sorted[Math.min(sorted.length - 1, Math.max(0, Math.ceil(share * sorted.length) - 1))];
}

/** Messages between which the interval of their mean is drawn: fewer say too little, more need none. */
const FEWEST_MESSAGES = 8;
const MOST_MESSAGES = 20_000;

function messageBytes(bits: Float64Array): NonNullable<CellRecord['message_bytes']> {
  const bytes = Float64Array.from(bits, (b) => b / 8).sort();
  let sum = 0;
  for (const value of bytes) sum += value;
  const drawn = bytes.length >= FEWEST_MESSAGES && bytes.length <= MOST_MESSAGES;
  const interval = drawn ? bcaMean(bytes, { seed: 1, repetitions: 400 }) : undefined;
  return {
    mean: sum / bytes.length,
    ...(interval === undefined ? {} : { mean_low: interval.low, mean_high: interval.high }),
    p50: quantile(bytes, 0.5),
    p95: quantile(bytes, 0.95),
    p99: quantile(bytes, 0.99),
    max: bytes[bytes.length - 1],
  };
}

function filesOf(bits: CellBits, corpus: CorpusData): NonNullable<CellRecord['files']> {
  const messageBits = bitsOfCorpusMessages(bits, corpus);
  let message = 0;
  let symbolsBefore = 0;
  return corpus.testFiles.map((file) => {
    let carried = 0;
    for (; message < file.messageEnd; message++) carried += messageBits[message];
    const symbolEnd = message === 0 ? 0 : corpus.test.messageEnds[message - 1];
    const symbolCount = symbolEnd - symbolsBefore;
    symbolsBefore = symbolEnd;
    // Bits spread over units are fractions, whose sum may miss a whole number by their rounding.
    const codedBytes = Math.ceil(Number((carried / 8).toFixed(6)));
    return { sha256: file.sha256, symbol_count: symbolCount, coded_bytes: codedBytes };
  });
}

function rateWithoutRepeats(bits: CellBits, corpus: CorpusData): number | undefined {
  const { repeated } = corpus;
  if (repeated === undefined || repeated.share === 0) return undefined;
  const messageBits = bitsOfCorpusMessages(bits, corpus);
  let carried = 0;
  let symbols = 0;
  let from = 0;
  corpus.test.messageEnds.forEach((end, i) => {
    if (repeated.mask[i] === 0) {
      carried += messageBits[i];
      symbols += end - from;
    }
    from = end;
  });
  return symbols === 0 ? undefined : carried / symbols;
}

/** Figures that only some plans ask for. */
export interface AskedFigures {
  /** Share of messages lost on the way. */
  readonly lossRate?: number;
  /** Bytes in which a link bills each message. */
  readonly billStepBytes?: number;
}

/** What a run record says of one cell. */
export function cellRecordOf(
  result: CellBits | CellFailure,
  corpus: CorpusData,
  floors: CorpusFloors,
  speed: { encode: Speed; decode: Speed } | undefined,
  asked: AskedFigures,
): CellRecord {
  const { cell } = result;
  const base = {
    id: cell.id,
    corpus: cell.corpus,
    candidate: cell.candidate.id,
    coder: cell.candidate.declaration.name,
    params: { ...cell.candidate.values },
    tables: cell.policy,
    reset: cell.reset,
    reference: cell.candidate.declaration.reference,
    decodes_alone: decodesAlone(cell),
    messages_as: corpus.messagesAs,
  };
  if ('failure' in result) return { ...base, verified: false, failure: result.failure };
  const { lossRate, billStepBytes } = asked;
  const filled = corpus.fill === undefined ? undefined : fillFigures(result, corpus);
  const symbolCount = corpus.test.symbols.length;
  const without = rateWithoutRepeats(result, corpus);
  return {
    ...base,
    verified: true,
    backend: 'ts',
    symbol_count: symbolCount,
    message_count: result.messageBits.length,
    coded_bytes: Math.ceil(result.totals.carriedBits / 8),
    carried_bits: result.totals.carriedBits,
    rate: symbolCount === 0 ? 0 : result.totals.carriedBits / symbolCount,
    account: bitAccount(floors.admit(result), floors.shareOf(cell)),
    ...(result.messageBits.length === 0 ? {} : { message_bytes: messageBytes(result.messageBits) }),
    ...filledRecord(filled),
    ...(lossRate === undefined
      ? {}
      : { loss: lossRecord(lossFigures(cell, corpus, lossRate, filled?.mean)) }),
    ...(billStepBytes === undefined
      ? {}
      : { billing: billingRecord(billingFigures(result, corpus, billStepBytes)) }),
    ...(without === undefined ? {} : { rate_without_repeats: without }),
    files: filesOf(result, corpus),
    ...(result.perField === undefined ? {} : { fields: fieldsOf(result.perField) }),
    ...costRecord(result.cost),
    ...(speed === undefined
      ? {}
      : { encode: speedRecord(speed.encode), decode: speedRecord(speed.decode) }),
  };
}

function filledRecord(
  figures: FillFigures | undefined,
): Pick<CellRecord, 'units_per_message' | 'unit_count'> {
  if (figures === undefined) return {};
  const { unitCount, mean, min } = figures;
  return { units_per_message: { mean, min }, unit_count: unitCount };
}

function fieldsOf(fields: readonly FieldPrice[]): NonNullable<CellRecord['fields']> {
  return fields.map(({ name, idealBits, choice }) => ({
    name,
    bits: Math.round(idealBits * 1000) / 1000,
    choice,
  }));
}

function lossRecord(figures: LossFigures): NonNullable<CellRecord['loss']> {
  const { share, perLostMessage, unitsPerLostMessage } = figures;
  return {
    share,
    per_lost_message: perLostMessage,
    ...(unitsPerLostMessage === undefined ? {} : { units_per_lost_message: unitsPerLostMessage }),
  };
}

function billingRecord(figures: BillingFigures): NonNullable<CellRecord['billing']> {
  const { stepBytes, steps, stepsPerUnit, unusedShare } = figures;
  return { step_bytes: stepBytes, steps, steps_per_unit: stepsPerUnit, unused_share: unusedShare };
}

function speedRecord(speed: Speed): NonNullable<CellRecord['encode']> {
  return { ...speed, seconds: [...speed.seconds] };
}
