import fc from 'fast-check';
import { afterEach, describe, expect, it, vi } from 'vitest';
import { AdditiveModel } from '../../src/models/additive-model.ts';
import { BackOffModel } from '../../src/models/back-off-model.ts';
import { ContextTree } from '../../src/models/context-tree.ts';
import { CountingAdditive } from '../../src/models/counting-additive.ts';
import { CountingBackOff } from '../../src/models/counting-back-off.ts';
import { CountingContexts } from '../../src/models/counting-contexts.ts';
import { OperationTally } from '../../src/models/counting-tally.ts';

/**
 * The models' own decoders over arrays that count how often an element is read. Lengths tell what is not counted or counted
 * elsewhere: the contexts and positions (up to 3 elements), and the tables by one and two symbols.
 */
const ALPHABET = 5;
const APART = [ALPHABET + 1, (ALPHABET + 1) ** 2];

let reads = 0;
const targets = new WeakMap<object, object>();

function watched<T extends Uint32Array | Int32Array | Uint8Array>(array: T): T {
  if (array.length <= 3 || APART.includes(array.length)) return array;
  const proxy = new Proxy(array, {
    get(target, key) {
      if (typeof key === 'string' && /^\d+$/.test(key)) reads++;
      const value = Reflect.get(target, key, target);
      if (typeof value !== 'function') return value;
      if (key === 'set')
        return (source: object) => target.set((targets.get(source) ?? source) as T);
      if (key === 'copyWithin') {
        return (to: number, from: number, end: number) => {
          reads += end - from;
          target.copyWithin(to, from, end);
        };
      }
      return value.bind(target);
    },
  });
  targets.set(proxy, array);
  return proxy as T;
}

function watchArrays(): void {
  for (const Type of [Uint32Array, Int32Array, Uint8Array] as const) {
    vi.stubGlobal(
      Type.name,
      new Proxy(Type, { construct: (target, args) => watched(Reflect.construct(target, args)) }),
    );
  }
}

afterEach(() => vi.unstubAllGlobals());

/** Reads of a decoder that is told the intervals, one after another. */
function readsOfDecoder(make: () => BackOffModel | AdditiveModel, symbols: Uint16Array): number {
  const lows: number[] = [];
  make().encode(symbols, 0, symbols.length, { put: (low) => lows.push(low) });
  watchArrays();
  const model = make();
  model.startContexts();
  reads = 0;
  let at = 0;
  const out: number[] = Array.from(symbols, () => -1);
  model.decode(
    { target: () => lows[at], take: () => at++ },
    out as unknown as Uint16Array,
    0,
    symbols.length,
  );
  vi.unstubAllGlobals();
  expect(out).toEqual([...symbols]);
  expect(at).toBe(lows.length);
  return reads;
}

/** Reads for finding contexts. */
function readsForContexts(order: number, symbols: Uint16Array): number {
  const tally = new OperationTally();
  const tree = new ContextTree(ALPHABET, order);
  const contexts = new CountingContexts(tree, 1024, tally, new OperationTally());
  for (const symbol of symbols) contexts.advance(symbol);
  return tally.tableReads;
}

/** How often the context of the last `order` symbols, start included, has seen two symbols or more before. */
function symbolsInRuns(order: number, symbols: Uint16Array): number {
  const seen = new Map<string, Set<number>>();
  let count = 0;
  const history = Array.from({ length: order }, () => ALPHABET);
  for (const symbol of symbols) {
    const context = history.slice(history.length - order).join();
    const own = seen.get(context) ?? new Set();
    if (own.size >= 2) count++;
    seen.set(context, own.add(symbol));
    history.push(symbol);
  }
  return count;
}

const sequences = fc
  .array(fc.integer({ min: 0, max: ALPHABET - 1 }), { maxLength: 200, size: 'max' })
  .map((symbols) => Uint16Array.from(symbols));

describe('table reads are those of the models themselves', () => {
  it('back-off, without its shortcut', () => {
    fc.assert(
      fc.property(sequences, fc.integer({ min: 1, max: 2 }), (symbols, order) => {
        // A bound of 0 keeps the shortcut out, and has every count settled.
        const make = () => new BackOffModel(ALPHABET, order, 0);
        const own = readsOfDecoder(make, symbols);
        const decoder = new OperationTally();
        const counting = new CountingBackOff(
          make(),
          ALPHABET,
          order,
          0,
          1024,
          new OperationTally(),
          decoder,
        );
        counting.code(symbols, 0, symbols.length, { put() {} });
        // Before it leaves the shortcut, the model reads a context's three words, and the length of its run.
        const shortcut = 3 * symbols.length + symbolsInRuns(order, symbols);
        expect(decoder.counts().total.tableReads).toBe(
          own - shortcut + readsForContexts(order, symbols),
        );
      }),
      { numRuns: 150, seed: 31 },
    );
  });

  it('additive', () => {
    fc.assert(
      fc.property(
        sequences,
        fc.integer({ min: 0, max: 2 }),
        fc.constantFrom({ p: 1, q: 2 }, { p: 3, q: 7 }),
        fc.constantFrom(0, 20, 1000),
        (symbols, order, added, more) => {
          const halveAt = added.p * ALPHABET + 2 * added.q + more;
          const make = () => new AdditiveModel(ALPHABET, order, added, halveAt);
          const own = readsOfDecoder(make, symbols);
          const decoder = new OperationTally();
          const counting = new CountingAdditive(
            make(),
            ALPHABET,
            order,
            added,
            halveAt,
            1024,
            new OperationTally(),
            decoder,
          );
          counting.code(symbols, 0, symbols.length, { put() {} });
          const contexts = order === 0 ? 0 : readsForContexts(order, symbols);
          expect(decoder.counts().total.tableReads).toBe(own + contexts);
        },
      ),
      { numRuns: 150, seed: 32 },
    );
  });
});
