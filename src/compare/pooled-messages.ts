import { messageBytes } from '../harness/message-figures.ts';
import type { MessagePairs } from '../harness/run-all.ts';
import type { CellRecord } from '../harness/run-record.ts';
import { joined, partsOfId } from './contenders.ts';
import { pooledRun } from './pooled-record.ts';
import type { LoadedRun } from './read-messages.ts';

/** With sizes of messages over all folds; where messages are filled, the figures are of units and tell none. */
function withMessageBytes(cell: CellRecord, pairs: MessagePairs | undefined): CellRecord {
  if (cell.message_bytes !== undefined || pairs === undefined || cell.unit_count !== undefined)
    return cell;
  if (!cell.verified || pairs.bits.length === 0) return cell;
  return { ...cell, message_bytes: messageBytes(pairs.bits) };
}

/**
 * A run whose folds are pooled, as {@link pooledRun} pools its record, with the figures of all messages: those of the folds one
 * after another, as they lie in the corpus. Without folds the run as it is.
 */
export function pooledLoadedRun(run: LoadedRun): LoadedRun {
  const { record, foldRates } = pooledRun(run.record);
  if (foldRates.size === 0) return { record, messages: run.messages };
  const byFold = new Map<string, { fold: number; pairs: MessagePairs }[]>();
  for (const [id, pairs] of run.messages) {
    const { base, fold } = partsOfId(id);
    byFold.set(base, [...(byFold.get(base) ?? []), { fold, pairs }]);
  }
  const messages = new Map<string, MessagePairs>();
  for (const [id, folds] of byFold) {
    const inOrder = folds.toSorted((a, b) => a.fold - b.fold);
    messages.set(id, {
      bits: joined(inOrder.map(({ pairs }) => pairs.bits)),
      symbols: joined(inOrder.map(({ pairs }) => pairs.symbols)),
    });
  }
  const cells = record.cells.map((cell) => withMessageBytes(cell, messages.get(cell.id)));
  return { record: { ...record, cells }, messages };
}
