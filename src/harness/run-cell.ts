import type { CodedTotals } from '../account/bit-account.ts';
import type { Coded, FieldPrice, FitClass, Setup } from '../coders/contract.ts';
import { compareDecoded, decodeUnit, trainOn } from '../coders/verify.ts';
import { BitassayError, BugError } from '../errors/errors.ts';
import { messageCountOf, type SymbolSequence } from '../symbols/sequence.ts';
import { type Cell, unitResetOf } from './cells.ts';
import { type CorpusData, unitsOf } from './corpus-data.ts';
import { type CostFigures, costFigures } from './cost-figures.ts';
import { whyNotOnSample } from './sample-cells.ts';
import { setupBase } from './setup-base.ts';

/** What coding a cell gave, before it is held against a floor. */
export interface CellBits {
  readonly cell: Cell;
  readonly totals: CodedTotals;
  /** The class behind `totals.fitBits`. */
  readonly fitOf?: FitClass;
  /** Carried bits of each message. */
  readonly messageBits: Float64Array;
  /** For each message the index one past its last symbol: the corpus's own, or as the coder filled them. */
  readonly messageEnds: Uint32Array;
  /** Ideal bits of each message; absent for coders without probabilities. */
  readonly messageIdealBits?: Float64Array;
  /** Ideal bits of each field, for coders that code a record by its fields. */
  readonly perField?: readonly FieldPrice[];
  /** What it would take on a device. */
  readonly cost: CostFigures;
  /** Carried bits of the alphabet map, padding included, sent once before the messages. */
  readonly mapBits: number;
  /** The units as coded, for timing. */
  readonly units: readonly CodedUnit[];
}

/** One unit with what both ends need to code it again. */
export interface CodedUnit {
  /** What the encoder was given. */
  readonly sequence: SymbolSequence;
  /** The same with the messages that came out: others only under fill, where those given are units. */
  readonly messages: SymbolSequence;
  readonly setup: Setup;
  readonly coded: Coded;
}

/** A cell that gave no rate, and why. */
export interface CellFailure {
  readonly cell: Cell;
  readonly failure: string;
}

/** Steps between which a run may be interrupted. */
export type CellStep = 'train' | 'encode' | 'decode' | 'price';

/** Policies under which what the coder knows is sent or grown, so that a fitted alphabet map must be sent too. */
function sendsMap(cell: Cell): boolean {
  return cell.policy === 'sent' || cell.policy === 'learned' || cell.policy === 'none';
}

/** The sequence with the messages that its encoder made of it. */
function messagesOf(sequence: SymbolSequence, { symbolEnds }: Coded): SymbolSequence {
  return symbolEnds === undefined ? sequence : { ...sequence, messageEnds: symbolEnds };
}

/**
 * What both ends of a cell agree on before its first bit, tables trained or, where they are sent, fitted to the unit.
 * @throws InputError where the coder cannot work so
 */
export function setupOf(cell: Cell, corpus: CorpusData, unit?: SymbolSequence): Setup {
  const base = setupBase(corpus, cell.policy, unitResetOf(cell), cell.align);
  cell.candidate.create().check?.(base);
  let from: SymbolSequence | undefined;
  if (cell.policy === 'shipped' || cell.policy === 'primed') {
    if (corpus.train === undefined)
      throw new BugError(`${cell.id} needs a train split and there is none`);
    from = corpus.train;
  } else if (cell.policy === 'sent' && base.reset === 'never') {
    from = unit;
  }
  const tables = from === undefined ? undefined : trainOn(cell.candidate, base, from);
  return tables === undefined ? base : { ...base, tables };
}

function sumCoded(
  units: readonly CodedUnit[],
): Omit<CodedTotals, 'carriedBits' | 'idealBits' | 'fitBits'> {
  const sum = {
    writtenBits: 0,
    endingBits: 0,
    paddingBits: 0,
    tableBits: 0,
    indexBits: 0,
    framingBits: 0,
    checkBits: 0,
    payloadBits: 0,
  };
  for (const { coded } of units) {
    for (const key of Object.keys(coded.account) as (keyof typeof coded.account)[]) {
      sum[key] += coded.account[key];
    }
    sum.payloadBits += coded.payloadBits;
  }
  return sum;
}

/** Encodes the unit whole, in one push. */
export function encodeUnit(cell: Cell, setup: Setup, sequence: SymbolSequence): Coded {
  const encoder = cell.candidate.create().encoder(setup);
  encoder.push(sequence);
  return encoder.finish();
}

function messageBitsOf(units: readonly CodedUnit[]): Float64Array {
  const messageCount = units.reduce((sum, { messages }) => sum + messageCountOf(messages), 0);
  const bits = new Float64Array(messageCount);
  let at = 0;
  for (const { coded } of units) {
    let from = 0;
    for (const end of coded.messageEndsBits) {
      bits[at++] = end - from;
      from = end;
    }
  }
  if (at !== messageCount) throw new BugError('the units of a cell do not hold its messages');
  return bits;
}

/**
 * Trains, encodes, decodes, compares and prices one cell. A rate exists only if the decode gave back the input bit for bit.
 *
 * @param pause  awaited between steps, so that a run can be shown and interrupted; may throw to stop
 * @throws what `pause` throws; what a coder throws becomes a {@link CellFailure}
 */
export async function runCell(
  cell: Cell,
  corpus: CorpusData,
  pause: (step: CellStep) => Promise<void>,
): Promise<CellBits | CellFailure> {
  const refusal = whyNotOnSample(cell, corpus);
  if (refusal !== undefined) return { cell, failure: refusal };
  const units: CodedUnit[] = [];
  const coder = cell.candidate.create();
  let idealBits = 0;
  let fitBits: number | undefined;
  let fitOf: FitClass | undefined;
  let perField: readonly FieldPrice[] | undefined;
  let priced = coder.price !== undefined;
  const idealBitsOfUnits: Float64Array[] = [];
  const guarded = <T>(step: () => T): T | CellFailure => {
    try {
      return step();
    } catch (error) {
      if (error instanceof BitassayError)
        return { cell, failure: `${error.message}${placeOf(error)}` };
      throw error;
    }
  };
  const sequences = unitsOf(corpus, cell.reset);
  for (const sequence of sequences) {
    await pause('train');
    const setup = guarded(() => setupOf(cell, corpus, sequence));
    if ('failure' in setup) return setup;
    await pause('encode');
    const coded = guarded(() => encodeUnit(cell, setup, sequence));
    if ('failure' in coded) return coded;
    await pause('decode');
    const messages = messagesOf(sequence, coded);
    const verdict = guarded(() => {
      compareDecoded(decodeUnit(cell.candidate, setup, coded, messages), coded, messages);
      return 'same' as const;
    });
    if (verdict !== 'same') return verdict;
    units.push({ sequence, messages, setup, coded });
    if (!priced) continue;
    await pause('price');
    const price = guarded(() => coder.price!(messages, setup));
    if ('failure' in price) return price;
    idealBits += price.idealBits;
    if (price.perField !== undefined) perField = addFields(perField, price.perField);
    if (price.fit !== undefined && sequences.length === 1) {
      fitBits = price.fit.bits;
      fitOf = price.fit.of;
    }
    idealBitsOfUnits.push(price.messageIdealBits);
  }
  priced &&= units.length > 0;
  if (priced && sequences.length > 1) {
    // One member for all files: priced over the whole test part, whose contexts differ from the cell's own only in the
    // first k symbols of each file.
    await pause('price');
    const whole = guarded(() => {
      // Tables that were fitted to one unit need not know the symbols of another.
      const setup = cell.policy === 'sent' ? setupOf(cell, corpus, corpus.test) : units[0].setup;
      return coder.price!(corpus.test, setup);
    });
    if ('failure' in whole) return whole;
    fitBits = whole.fit?.bits;
    fitOf = whole.fit?.of;
  }
  const sum = sumCoded(units);
  const sentBits = sendsMap(cell) && corpus.sentMap !== undefined ? corpus.sentMap.bits : 0;
  const mapBits = Math.ceil(sentBits / cell.align) * cell.align;
  const messageBits = messageBitsOf(units);
  await pause('price');
  const cost = guarded(() => costFigures(coder, units, mapBits));
  if ('failure' in cost) return cost;
  let carriedBits = mapBits;
  for (const bits of messageBits) carriedBits += bits;
  return {
    cell,
    totals: {
      ...sum,
      tableBits: sum.tableBits + sentBits,
      paddingBits: sum.paddingBits + mapBits - sentBits,
      carriedBits,
      ...(priced ? { idealBits } : {}),
      ...(priced && fitBits !== undefined ? { fitBits } : {}),
    },
    ...(fitOf === undefined ? {} : { fitOf }),
    messageBits,
    messageEnds:
      corpus.fill === undefined ? corpus.test.messageEnds : units[0].messages.messageEnds,
    ...(priced ? { messageIdealBits: joined(idealBitsOfUnits) } : {}),
    ...(perField === undefined ? {} : { perField }),
    cost,
    mapBits,
    units,
  };
}

function joined(parts: readonly Float64Array[]): Float64Array {
  if (parts.length === 1) return parts[0];
  const whole = new Float64Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    whole.set(part, at);
    at += part.length;
  }
  return whole;
}

/** Sums over units, whose fields are the same. */
function addFields(
  sum: readonly FieldPrice[] | undefined,
  more: readonly FieldPrice[],
): readonly FieldPrice[] {
  if (sum === undefined) return more;
  return more.map((field, i) => ({ ...field, idealBits: field.idealBits + sum[i].idealBits }));
}

/** Where a failure was met and what to do, as it is put behind its message. */
export function placeOf(error: BitassayError): string {
  const { expected, got, bitOffset, messageIndex, advice } = error.where;
  const parts = [
    messageIndex === undefined ? '' : `message ${messageIndex}`,
    bitOffset === undefined ? '' : `bit ${bitOffset}`,
    expected === undefined ? '' : `expected ${expected}`,
    got === undefined ? '' : `got ${got}`,
  ].filter((part) => part !== '');
  return `${parts.length === 0 ? '' : ` (${parts.join(', ')})`}${advice === undefined ? '' : `. ${advice}`}`;
}
