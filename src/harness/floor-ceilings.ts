import {
  adaptiveCeilings,
  CeilingStop,
  type NoCeiling,
  noCeilingReason,
} from '../entropy/ceilings.ts';
import { ctwCeiling, ctwName } from '../entropy/ctw-ceiling.ts';
import type { Ceiling } from '../entropy/floor.ts';
import { BitassayError, BugError } from '../errors/errors.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { CorpusShape, SequenceShape } from './corpus-data.ts';
import type { FloorPieces } from './floor-pieces.ts';
import type { CellBits, CellFailure } from './run-cell.ts';
import { variationText } from './variation.ts';

/** Adaptive back-off coders of these orders always stand among the ceilings. */
const CEILING_ORDER = 4;

/** The same sequence, whose symbols must be at hand. */
export function symbolsOf(sequence: SequenceShape): SymbolSequence {
  if (ArrayBuffer.isView(sequence.symbols)) return sequence as SymbolSequence;
  throw new BugError('symbols were needed that lie outside memory');
}

/**
 * What verified cells reach, in bits per symbol: ideal + tables + index, or all carried bits where a coder has no ideal. Any
 * code that can be decoded bounds the entropy rate from above, whatever its tables and resets. Named by candidate; only a
 * `learned` one that never resets takes the place of a ceiling run.
 */
export function ceilingsOf(
  results: readonly (CellBits | CellFailure)[],
  corpus: CorpusShape,
): Ceiling[] {
  const { test } = corpus;
  const ceilings: Ceiling[] = [];
  for (const result of results) {
    if ('failure' in result) continue;
    const { cell, totals } = result;
    const neverResets = cell.reset === 'never' || test.messageEnds.length <= 1;
    const { idealBits, tableBits, indexBits, carriedBits } = totals;
    const bits = idealBits === undefined ? carriedBits : idealBits + tableBits + indexBits;
    const { policy, reset, candidate } = cell;
    const { align, trainShare } = cell.vary ?? {};
    const variation = variationText({
      ...(align === undefined ? {} : { align }),
      ...(trainShare === undefined ? {} : { trainShare }),
    });
    const name =
      policy === 'learned' && neverResets
        ? candidate.id + variation
        : `${candidate.id}@${policy}/${reset}${variation}`;
    ceilings.push({ name, bitsPerSymbol: bits / test.symbols.length });
  }
  return ceilings;
}

/**
 * Adds to `ceilings` what the coders that always stand among them reach; order by order, while they need less.
 * @param ctw  also context-tree weighting
 * @returns those that gave none, and why
 */
export async function runCeilings(
  test: SequenceShape,
  ceilings: Ceiling[],
  pieces: FloorPieces,
  ctw: boolean,
  pause: () => Promise<void>,
): Promise<NoCeiling[]> {
  const none: NoCeiling[] = [];
  const stop = new CeilingStop(Math.min(...ceilings.map((c) => c.bitsPerSymbol)));
  for (let order = 0; order <= CEILING_ORDER; order++) {
    const name = `arith:order=${order}`;
    let known = ceilings.find((c) => c.name === name);
    if (known === undefined && stop.reason !== undefined) {
      none.push({ name, reason: stop.reason });
      continue;
    }
    if (known === undefined) {
      await pause();
      const run = pieces.take(`ceiling ${name}`, () => adaptiveCeiling(test, order));
      known = run.ceilings.find((c) => c.name === name);
      if (known !== undefined) ceilings.push(known);
      none.push(...run.without);
    }
    if (known !== undefined) stop.note(known);
  }
  if (!ctw) return none;
  const name = ctwName(test.alphabetSize);
  const [equalLengths] = ceilings;
  if (ceilings.every((c) => c.bitsPerSymbol >= equalLengths.bitsPerSymbol)) {
    none.push({ name, reason: 'not run: no other coder needs less than equal lengths' });
    return none;
  }
  await pause();
  const found = pieces.take(`ceiling ${name}`, (): Ceiling | NoCeiling => {
    try {
      return ctwCeiling(symbolsOf(test));
    } catch (error) {
      if (!(error instanceof BitassayError)) throw error;
      return { name, reason: noCeilingReason(error) };
    }
  });
  if ('reason' in found) none.push(found);
  else ceilings.push(found);
  return none;
}

/** As plain data: of an error only its words. */
function adaptiveCeiling(test: SequenceShape, order: number) {
  const { ceilings, without } = adaptiveCeilings(symbolsOf(test), { from: order, upto: order });
  return { ceilings, without: without.map(({ name, reason }) => ({ name, reason })) };
}
