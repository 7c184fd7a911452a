import { evenCounts, type Operations } from '../models/counting-tally.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { TransformChain } from '../transforms/chain.ts';
import { parseTransform } from '../transforms/registry.ts';
import type { Setup } from './contract.ts';
import {
  atBothEnds,
  type BothEnds,
  type EndCost,
  type EndOperations,
  extraCost,
  integerBytes,
  stackOperations,
  sumOf,
} from './cost.ts';

/** What a step of `after=` takes for each symbol of the product, and beside that. */
interface StepCost {
  /** Symbols that are kept, at either end. */
  readonly keptSymbols: number;
  /** Statements of the forward and of the inverse direction. */
  readonly statements: readonly [forward: number, inverse: number];
  readonly forward: Partial<Operations>;
  readonly inverse: Partial<Operations>;
}

const same = (keptSymbols: number, statements: number, each: Partial<Operations>): StepCost => ({
  keptSymbols,
  statements: [statements, statements],
  forward: each,
  inverse: each,
});

/**
 * - `delta`: whether the difference, or the sum, leaves the alphabet; the symbol before. `delta2`: twice so.
 * - `lagN`: whether so many symbols are there, one of them read, whether it leaves the alphabet, whether the ring ends. Below N
 *   symbols the read and one test are spared; they are counted, so that all symbols are alike.
 * - `xorN`: the same without the alphabet.
 * - `zigzag`: which half, or which sign.
 * - planes: nothing on the way out, on the way back whether a symbol put together lies in the alphabet.
 */
const STEPS: Readonly<Record<string, (lag: number) => StepCost>> = {
  delta: () => same(1, 4, { branches: 1 }),
  delta2: () => same(2, 7, { branches: 2 }),
  lag: (lag) => same(lag, 10, { tableReads: 1, branches: 3 }),
  xor: (lag) => same(lag, 9, { tableReads: 1, branches: 2 }),
  zigzag: () => same(0, 3, { branches: 1 }),
  'bit-planes': () => planes(),
  'byte-planes': () => planes(),
};

const planes = (): StepCost => ({
  keptSymbols: 0,
  statements: [6, 10],
  forward: {},
  inverse: { branches: 1 },
});

/** `delta2` is a name of its own, `xor3` one with a number. */
function stepOf(name: string): StepCost | undefined {
  const parts = /^(lag|xor)(\d+)$/.exec(name);
  return STEPS[parts?.[1] ?? name]?.(Number(parts?.[2] ?? 1));
}

/** Each step with the alphabet and the number of symbols, for one of the product, that it is given. */
function walk(
  chain: TransformChain,
  alphabetSize: number,
  take: (step: StepCost, alphabetSize: number, symbolsPerSymbol: number, isWhole: boolean) => void,
): boolean {
  let size = alphabetSize;
  let symbols = 1;
  for (const name of chain.name.split('.')) {
    const step = stepOf(name);
    if (step === undefined) return false;
    const transform = parseTransform(name);
    take(step, size, symbols, transform.needsWholeMessage);
    const shape = transform.shape(size);
    size = shape.alphabetSize;
    symbols *= shape.symbolsPerSymbol;
  }
  return true;
}

/**
 * State and code of a chain: the symbols that its steps keep, in as many bytes as their alphabets need, with the place in a ring of
 * several; at the encoder, where planes follow another step, a message of what that step makes, since planes walk over it
 * several times. Undefined where a step does not tell.
 */
export function chainCosts(
  chain: TransformChain,
  { alphabetSize }: Setup,
  { messageEnds }: SymbolSequence,
): BothEnds<EndCost> | undefined {
  let longest = 0;
  messageEnds.forEach((end, i) => {
    longest = Math.max(longest, end - (i === 0 ? 0 : messageEnds[i - 1]));
  });
  let costs: BothEnds<EndCost> = { encoder: extraCost(0, 0, 0), decoder: extraCost(0, 0, 0) };
  let isFirst = true;
  const isKnown = walk(chain, alphabetSize, (step, size, symbols, isWhole) => {
    const symbolBytes = integerBytes(size - 1);
    const ringBytes = step.keptSymbols > 2 ? 2 * integerBytes(step.keptSymbols) : 0;
    const keptBytes = step.keptSymbols * symbolBytes + ringBytes;
    const heldBytes = isWhole && !isFirst ? longest * symbols * symbolBytes : 0;
    isFirst = false;
    costs = atBothEnds(
      costs,
      {
        encoder: extraCost(0, keptBytes + heldBytes, step.statements[0]),
        decoder: extraCost(0, keptBytes, step.statements[1]),
      },
      sumOf,
    );
  });
  return isKnown ? costs : undefined;
}

/** What the steps take for each symbol of the product. */
export function chainOperations(
  chain: TransformChain,
  { alphabetSize, symbols }: SymbolSequence,
): EndOperations | undefined {
  const times = (each: Partial<Operations>, factor: number): Partial<Operations> => ({
    tableReads: factor * (each.tableReads ?? 0),
    branches: factor * (each.branches ?? 0),
  });
  const none = evenCounts(symbols.length, {});
  let operations: EndOperations = { encoder: none, decoder: none };
  const isKnown = walk(chain, alphabetSize, ({ forward, inverse }, _, factor) => {
    operations = stackOperations(operations, {
      encoder: evenCounts(symbols.length, times(forward, factor)),
      decoder: evenCounts(symbols.length, times(inverse, factor)),
    });
  });
  return isKnown ? operations : undefined;
}

/** The coder's counts, which are for each symbol after the chain, as counts for each symbol of the product. */
export function perProductSymbol(
  operations: EndOperations,
  symbolCount: number,
  symbolsPerSymbol: number,
): EndOperations {
  if (symbolsPerSymbol === 1) return operations;
  const end = (which: keyof EndOperations): EndOperations['encoder'] => {
    const { worst, ...counts } = operations[which];
    const scaled = evenCounts(symbolsPerSymbol, worst).total;
    return { ...counts, symbolCount, worst: scaled };
  };
  return { encoder: end('encoder'), decoder: end('decoder') };
}
