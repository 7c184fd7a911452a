import type { CellRecord, CorpusRecord, EntropyRecord, RunRecord } from '../harness/run-record.ts';

/** The entropy entry whose contexts are those of the cell, or the only one there is. */
export function entropyOf(record: RunRecord, cell: CellRecord): EntropyRecord | undefined {
  const own = record.entropy.filter((e) => e.corpus === cell.corpus);
  return own.find((e) => e.contexts === (cell.decodes_alone ? 'message' : 'running')) ?? own[0];
}

/** The floor of the cell's own contexts, bits per symbol; the opening of short messages included. */
export function floorRateOf(record: RunRecord, cell: CellRecord): number {
  return entropyOf(record, cell)?.floor.point ?? 0;
}

/** Cells of one corpus. */
export function cellsOfCorpus(record: RunRecord, corpus: CorpusRecord): CellRecord[] {
  return record.cells.filter((cell) => cell.corpus === corpus.name);
}

/** The verified cell of least rate that is no reference; undefined when there is none. */
export function bestCell(cells: readonly CellRecord[]): CellRecord | undefined {
  let best: CellRecord | undefined;
  for (const cell of cells) {
    if (cell.verified && !cell.reference && (best === undefined || cell.rate! < best.rate!))
      best = cell;
  }
  return best;
}

/** `candidate, tables` of a cell, with what a reader must know of it to use it. */
export function cellPhrase(cell: CellRecord): string {
  if (cell.tables === 'none') return cell.candidate;
  const reset = cell.tables === 'learned' || cell.tables === 'primed' || cell.tables === 'sent';
  const scope = reset && (cell.message_count ?? 0) > 1 ? `, reset ${cell.reset}` : '';
  return `${cell.candidate}, ${cell.tables}${scope}`;
}
