import { bitAccount } from '../account/bit-account.ts';
import type { FieldPrice } from '../coders/contract.ts';
import { whyNotExported } from '../coders/exported.ts';
import { type BillingFigures, billingFigures } from './billing.ts';
import { type Cell, decodesAlone } from './cells.ts';
import type { CorpusShape } from './corpus-data.ts';
import type { CorpusFloors } from './corpus-floors.ts';
import { costRecord } from './cost-figures.ts';
import { bitsOfCorpusMessages, type FillFigures, fillFigures } from './fill-figures.ts';
import { type LossFigures, lossFigures } from './loss.ts';
import { growthRecord, messageBytes, messageGrowth } from './message-figures.ts';
import type { CellBits, CellFailure } from './run-cell.ts';
import type { CellRecord } from './run-record.ts';
import type { CellTimes } from './time-cell.ts';
import { timesRecordOf } from './time-record.ts';
import { varyRecord } from './variation.ts';

function filesOf(bits: CellBits, corpus: CorpusShape): NonNullable<CellRecord['files']> {
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

function rateWithoutRepeats(bits: CellBits, corpus: CorpusShape): number | undefined {
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

/** Only what both ends know beforehand can be exported: shipped tables, or none. */
function exportedForms(cell: Cell): boolean {
  const known = cell.policy === 'shipped' || cell.policy === 'none';
  return known && cell.align % 8 === 0 && whyNotExported(cell.candidate) === undefined;
}

/** What a run record says of one cell. */
export function cellRecordOf(
  result: CellBits | CellFailure,
  corpus: CorpusShape,
  floors: CorpusFloors,
  times: CellTimes | undefined,
  asked: AskedFigures,
): CellRecord {
  const { cell } = result;
  const vary = varyRecord(cell.vary ?? {});
  const base = {
    id: cell.id,
    corpus: cell.corpus,
    candidate: cell.candidate.id,
    coder: cell.candidate.declaration.name,
    params: { ...cell.candidate.values },
    tables: cell.policy,
    reset: cell.reset,
    reference: cell.candidate.declaration.reference,
    ...(vary === undefined ? {} : { vary }),
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
    ...(exportedForms(cell) ? { exports: ['json', 'c', 'ts'] } : {}),
    backend: 'ts',
    symbol_count: symbolCount,
    message_count: result.messageBits.length,
    coded_bytes: Math.ceil(result.totals.carriedBits / 8),
    carried_bits: result.totals.carriedBits,
    rate: symbolCount === 0 ? 0 : result.totals.carriedBits / symbolCount,
    account: bitAccount(floors.admit(result), floors.shareOf(cell)),
    ...(result.messageBits.length === 0 ? {} : { message_bytes: messageBytes(result.messageBits) }),
    ...growthRecord(messageGrowth(result, corpus), result.messageBits.length),
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
    ...(times === undefined ? {} : timesRecordOf(times)),
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
