import type { CellRecord, CorpusRecord } from '../harness/run-record.ts';
import { countText } from './figures.ts';
import { cellPhrase } from './floor-lines.ts';

/**
 * Says what the columns of flash and RAM hold.
 * @param grows  whether a model among the cells grows with what is coded, so that its RAM is no bound
 */
export function deviceNote(device: 'encoder' | 'decoder', grows: boolean): string {
  const growth = grows
    ? ' Under learned and primed, arith grows: its RAM is the most that these data made of it, and others can need more.'
    : '';
  return `Flash is the ${device}'s tables in bytes, without code; RAM its state, buffers and stack, measured on x86-64 for what can be exported and estimated for the rest.${growth} Where there is –, the coder does not tell. Code, operations and the other end are in the run record; measure on your device before you rely on them.`;
}

/** Whether RAM is told of a model that grows. */
export function someGrow(cells: readonly CellRecord[]): boolean {
  return cells.some(
    ({ coder, tables, decoder }) =>
      coder === 'arith' &&
      (tables === 'learned' || tables === 'primed') &&
      decoder?.ram_bytes !== undefined,
  );
}

/** What is coded in one step, where that is more than a symbol. */
function stepsOf({ coder }: CellRecord): string {
  if (coder === 'fields') return ' record';
  return coder === 'block-huffman' ? ' block' : '';
}

/** What a symbol takes of the cell at one end, on average and at most; undefined where it is not told. */
export function operationsNote(
  cell: CellRecord,
  device: 'encoder' | 'decoder',
  noun: string,
): string | undefined {
  const operations = cell[device]?.operations;
  if (operations === undefined) return undefined;
  const words = {
    multiplies: 'multiplies',
    divides: 'divides',
    table_reads: 'table reads',
    branches: 'branches on data',
  } as const;
  const kinds = (Object.keys(words) as (keyof typeof words)[]).map((kind) => {
    const { mean, worst } = operations[kind];
    return `${Number(mean.toPrecision(3))} ${words[kind]} (${countText(worst)})`;
  });
  const tables = cell.tables === 'sent' ? ', without what its tables take' : '';
  return `Operations of the ${device} of ${cellPhrase(cell)}, for each ${noun} on average, in parentheses the most of one${stepsOf(cell)}${tables}: ${kinds.join(', ')}.`;
}

/** In packets: the candidates whose decoder gives no symbol before it has the whole message; undefined where none. */
export function delayNote(cells: readonly CellRecord[], corpus: CorpusRecord): string | undefined {
  if (!/^(fill|records)/.test(corpus.messages_as)) return undefined;
  const whole = new Set(
    cells.filter((cell) => cell.verified && cell.holds_whole_message).map((cell) => cell.candidate),
  );
  if (whole.size === 0) return undefined;
  return `Need the whole message before their first symbol can be decoded: ${[...whole].join(', ')}.`;
}
