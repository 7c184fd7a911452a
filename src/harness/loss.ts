import type { Cell } from './cells.ts';
import { decodesAlone } from './cells.ts';
import { type CorpusShape, messagesOfUnits } from './corpus-data.ts';

/** What losing messages on the way does to a cell. */
export interface LossFigures {
  /** Share of messages that cannot be decoded, the lost ones included. */
  readonly share: number;
  /** Messages that cannot be decoded for each one lost. */
  readonly perLostMessage: number;
  /** The same in units, where messages are filled with them: a message holds its mean of units. */
  readonly unitsPerLostMessage?: number;
}

/**
 * Messages lost independently, each with probability `rate`: the i-th message after a reset decodes only if it and all
 * before it since that reset arrive, with probability (1 − rate)^i. Exact for that model; losses in bursts spoil fewer
 * messages for each lost one.
 * @param rate             above 0, below 1
 * @param unitsPerMessage  mean units of a message of the cell, where messages are filled
 */
export function lossFigures(
  cell: Cell,
  corpus: CorpusShape,
  rate: number,
  unitsPerMessage?: number,
): LossFigures {
  const share = lostShare(cell, corpus, rate);
  const perLostMessage = share / rate;
  return {
    share,
    perLostMessage,
    ...(unitsPerMessage === undefined
      ? {}
      : { unitsPerLostMessage: perLostMessage * unitsPerMessage }),
  };
}

function lostShare(cell: Cell, corpus: CorpusShape, rate: number): number {
  const groups = decodesAlone(cell) ? undefined : messagesOfUnits(corpus, cell.reset);
  if (groups === undefined) return rate;
  // Σ over i = 1 … g of 1 − (1 − rate)^i, in a form that stays exact for rare losses.
  const lostBySize = new Map<number, number>();
  let lost = 0;
  let messageCount = 0;
  for (const size of groups) {
    let own = lostBySize.get(size);
    if (own === undefined) {
      own = 0;
      for (let i = 1; i <= size; i++) own -= Math.expm1(i * Math.log1p(-rate));
      lostBySize.set(size, own);
    }
    lost += own;
    messageCount += size;
  }
  return messageCount === 0 ? 0 : lost / messageCount;
}
