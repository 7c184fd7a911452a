import type { CellRecord, CorpusRecord } from '../harness/run-record.ts';

/** Says what the columns of flash and RAM hold. */
export function deviceNote(device: 'encoder' | 'decoder'): string {
  return `Flash is the ${device}'s tables in bytes, without code; RAM its state, buffers and an estimate of its stack. Where there is –, the coder does not tell. Code, operations and the other end are in the run record; measure on your device before you rely on them.`;
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
