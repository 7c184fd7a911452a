import type { CellRecord } from './run-record.ts';

/** What the data of a cell differ in from what the plan says of its corpus; nothing where they do not. */
export interface DataVariation {
  /** Symbols of each message, instead of the corpus's own messages. */
  readonly messageSymbols?: number;
  /** Share of the train part that tables are trained on, below 1. */
  readonly trainShare?: number;
  /** From 1, where the plan has folds. */
  readonly fold?: number;
}

/** What a cell differs in from the plan's own. */
export interface Variation extends DataVariation {
  readonly align?: number;
}

/**
 * As it stands at the end of a cell's id: `+align=1+train_share=0.1+fold=2`; empty where nothing is varied. A value that is
 * the plan's own is no variation, so ids stay the same when a plan begins to vary something.
 */
export function variationText({ align, messageSymbols, trainShare, fold }: Variation): string {
  const text = (key: string, value: number | undefined): string =>
    value === undefined ? '' : `+${key}=${value}`;
  return (
    text('align', align) +
    text('message_symbols', messageSymbols) +
    text('train_share', trainShare) +
    text('fold', fold)
  );
}

/** Key of corpus data: no two of a run share one. */
export function dataKeyOf(corpus: string, { align: _, ...data }: Variation): string {
  return corpus + variationText(data);
}

/**
 * Key of what is coded. Data that differ only in what they train on share their test part, and so its entropies and floor.
 */
export function codedKeyOf(corpus: string, variation: Variation): string {
  const { trainShare: _, ...rest } = variation;
  return dataKeyOf(corpus, rest);
}

/** The reverse of {@link varyRecord}. */
export function variationOf(vary: NonNullable<CellRecord['vary']>): Variation {
  const { align, message_symbols, train_share, fold } = vary;
  return {
    ...(align === undefined ? {} : { align }),
    ...(message_symbols === undefined ? {} : { messageSymbols: message_symbols }),
    ...(train_share === undefined ? {} : { trainShare: train_share }),
    ...(fold === undefined ? {} : { fold }),
  };
}

/** Key of the data that a cell of a record coded. */
export function dataKeyOfCell({ corpus, vary = {} }: Pick<CellRecord, 'corpus' | 'vary'>): string {
  return dataKeyOf(corpus, variationOf(vary));
}

/** As a run record says it; undefined where nothing is varied. */
export function varyRecord(variation: Variation): CellRecord['vary'] {
  const { align, messageSymbols, trainShare, fold } = variation;
  const vary = {
    ...(align === undefined ? {} : { align }),
    ...(messageSymbols === undefined ? {} : { message_symbols: messageSymbols }),
    ...(trainShare === undefined ? {} : { train_share: trainShare }),
    ...(fold === undefined ? {} : { fold }),
  };
  return Object.keys(vary).length === 0 ? undefined : vary;
}

/** Whether figures that are not bits are measured: only the plan's own cells are timed, and those of the first fold. */
export function isPlain({ align, messageSymbols, trainShare, fold }: Variation): boolean {
  return (
    align === undefined &&
    messageSymbols === undefined &&
    trainShare === undefined &&
    (fold === undefined || fold === 1)
  );
}
