import type { Setup } from '../coders/contract.ts';
import type { Cell } from './cells.ts';
import { type CorpusData, unitsOf } from './corpus-data.ts';
import { type CodedUnit, encodeUnit, setupOf } from './run-cell.ts';

/** The units of a cell as it codes them. */
export async function codeUnits(
  cell: Cell,
  corpus: CorpusData,
  pause: () => Promise<void>,
): Promise<CodedUnit[]> {
  const units: CodedUnit[] = [];
  let known: Setup | undefined;
  for (const sequence of unitsOf(corpus, cell.reset)) {
    await pause();
    // Only tables that are sent differ from unit to unit.
    const setup: Setup =
      known === undefined || cell.policy === 'sent' ? setupOf(cell, corpus, sequence) : known;
    known = setup;
    const coded = encodeUnit(cell, setup, sequence);
    const { symbolEnds: messageEnds = sequence.messageEnds } = coded;
    units.push({ sequence, messages: { ...sequence, messageEnds }, setup, coded });
  }
  return units;
}
