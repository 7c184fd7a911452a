import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Coder, Setup, Tables } from './contract.ts';
import {
  bitsOfMessages,
  chooseTables,
  messagesWhere,
  startOfMessage,
} from './table-set-messages.ts';

/** Messages and symbols, about, on which tables are sought; all messages then train the tables that were found. */
const SAMPLE_MESSAGES = 2 ** 14;
const SAMPLE_SYMBOLS = 2 ** 18;
/** Messages that are tried as the beginning of each further table. */
const TRIED_BEGINNINGS = 4;
/** Times that all messages of the sample are given to their best table and all tables trained anew, at most. */
const ROUNDS = 8;

/**
 * `count` tables of `coder` for messages of several kinds: k-means with coded bits for the distance (S. P. Lloyd, IEEE Trans. Inf.
 * Theory 28(2), 1982, with the code length for the squared error).
 *
 * The first table is trained on all messages. Each further one begins at a message: those that its table codes best, symbol
 * for symbol against their best table so far, train the new table, as many as are a fair share of the symbols. Of a few such
 * beginnings the one that saves most bits is kept. Then, in rounds, each message goes to the table that gives it the fewest bits,
 * and each table is trained on its messages; the set with the fewest bits in all is kept. A table that no message wants stays as it is.
 *
 * Only integers are compared, so the tables are the same on every machine.
 * Cost: about 8 · count codings and trainings of each table on the sample, then count codings and one training of the whole.
 */
export function trainTableSet(
  coder: Coder,
  setup: Setup,
  whole: SymbolSequence,
  count: number,
): readonly Tables[] {
  if (count === 1) return [trainOn(coder, setup, whole)];
  const sample = sampleOf(whole);
  const found = refined(coder, setup, sample, begun(coder, setup, sample, count));
  const { owners } = chooseTables(coder, costSetup(setup), found, whole);
  return trainedAnew(coder, setup, whole, found, owners);
}

/** Messages at about even distances, whatever period the data have: a golden-ratio sequence decides. */
function sampleOf(whole: SymbolSequence): SymbolSequence {
  const share = Math.min(
    SAMPLE_MESSAGES / whole.messageEnds.length,
    SAMPLE_SYMBOLS / whole.symbols.length,
  );
  if (!(share < 1)) return whole;
  const below = Math.floor(share * 2 ** 32);
  return messagesWhere(whole, (i) => Math.imul(i, 0x9e3779b1) >>> 0 < below);
}

/** For tables against tables: symbol counts and padding are the same under each. */
function costSetup({ fill: _, unitSymbols: __, ...setup }: Setup): Setup {
  return { ...setup, lengths: 'known', align: 1 };
}

function trainOn(coder: Coder, setup: Setup, sequence: SymbolSequence): Tables {
  const trainer = coder.trainer!(setup);
  trainer.push(sequence);
  return trainer.finish();
}

function trainedAnew(
  coder: Coder,
  setup: Setup,
  messages: SymbolSequence,
  sets: readonly Tables[],
  owners: Uint8Array,
): readonly Tables[] {
  return sets.map((tables, table) => {
    const own = messagesWhere(messages, (i) => owners[i] === table);
    return own.symbols.length === 0 ? tables : trainOn(coder, setup, own);
  });
}

function refined(
  coder: Coder,
  setup: Setup,
  messages: SymbolSequence,
  begun: readonly Tables[],
): readonly Tables[] {
  let best = begun;
  let bestBits = Number.POSITIVE_INFINITY;
  let sets = begun;
  for (let round = 0; round <= ROUNDS; round++) {
    const choice = chooseTables(coder, costSetup(setup), sets, messages);
    if (choice.totalBits >= bestBits) break;
    best = sets;
    bestBits = choice.totalBits;
    if (round < ROUNDS) sets = trainedAnew(coder, setup, messages, sets, choice.owners);
  }
  return best;
}

/** The tables before the first round. */
function begun(
  coder: Coder,
  setup: Setup,
  messages: SymbolSequence,
  count: number,
): readonly Tables[] {
  const price = (tables: Tables) =>
    bitsOfMessages(coder, { ...costSetup(setup), tables }, messages);
  const sets = [trainOn(coder, setup, messages)];
  const leastBits = price(sets[0]);
  const symbolCounts = messages.messageEnds.map((end, i) => end - startOfMessage(messages, i));
  while (sets.length < count) {
    const share = messages.symbols.length / (sets.length + 1);
    let best = sets[0];
    let bestBits = leastBits;
    let bestSaved = -1;
    for (const index of beginnings(leastBits, symbolCounts)) {
      const alone = trainOn(
        coder,
        setup,
        messagesWhere(messages, (i) => i === index),
      );
      const added = price(alone).map((bits, i) => bits - leastBits[i]);
      const near = nearest(added, symbolCounts, share);
      const tables = trainOn(
        coder,
        setup,
        messagesWhere(messages, (i) => near[i] === 1),
      );
      const bits = price(tables);
      let saved = 0;
      for (let i = 0; i < bits.length; i++) saved += Math.max(0, leastBits[i] - bits[i]);
      if (saved <= bestSaved) continue;
      best = tables;
      bestBits = bits;
      bestSaved = saved;
    }
    sets.push(best);
    for (let i = 0; i < leastBits.length; i++) leastBits[i] = Math.min(leastBits[i], bestBits[i]);
  }
  return sets;
}

/** Messages with symbols, by rising bits a symbol, of equals in their order. */
function byBitsPerSymbol(bits: Float64Array, symbolCounts: Uint32Array): Uint32Array {
  const order = new Uint32Array(bits.length);
  let count = 0;
  for (let i = 0; i < bits.length; i++) if (symbolCounts[i] > 0) order[count++] = i;
  return order
    .subarray(0, count)
    .sort((a, b) => bits[a] * symbolCounts[b] - bits[b] * symbolCounts[a] || a - b);
}

/** A few messages, from those that are coded well so far to those that are coded badly. */
function beginnings(leastBits: Float64Array, symbolCounts: Uint32Array): Set<number> {
  const order = byBitsPerSymbol(leastBits, symbolCounts);
  const chosen = new Set<number>();
  for (let i = 0; i < TRIED_BEGINNINGS && order.length > 0; i++)
    chosen.add(order[Math.floor(((2 * i + 1) * order.length) / (2 * TRIED_BEGINNINGS))]);
  return chosen;
}

/** Marks the messages with the fewest bits a symbol, until they hold `share` symbols. */
function nearest(bits: Float64Array, symbolCounts: Uint32Array, share: number): Uint8Array {
  const marks = new Uint8Array(bits.length);
  let held = 0;
  for (const i of byBitsPerSymbol(bits, symbolCounts)) {
    if (held >= share) break;
    marks[i] = 1;
    held += symbolCounts[i];
  }
  return marks;
}
