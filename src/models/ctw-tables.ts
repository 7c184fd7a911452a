import { DECISION_TOTAL } from './binary-decision.ts';
import { COST_PER_BIT, integerLog2 } from './table-cost.ts';

/** Log-odds are held in 1/65536 bit; weights are tabled in steps of 1/256 bit, to 16 bits either way. */
const STEPS_PER_BIT = 256;
const MOST_BITS = 16;
/** Shifts log-odds to steps of the table. */
export const WEIGHT_SHIFT = 8;
/** Beyond this many steps the weight is that at the table's end. */
export const MOST_STEPS = MOST_BITS * STEPS_PER_BIT;

/** Tables of context-tree weighting, made from integers alone, so that they are the same on every machine. */
export interface CtwTables {
  /** −log2(p ÷ 65536) in 1/65536 bit for p = 1 … 65 535. */
  readonly costs: Uint32Array;
  /** β ÷ (1 + β) in 65536ths for log2 β of −16 … 16 bits in steps of 1/256 bit. */
  readonly weights: Uint32Array;
}

let tables: CtwTables | undefined;

/** Made once; some 10 ms. */
export function ctwTables(): CtwTables {
  tables ??= { costs: makeCosts(), weights: makeWeights() };
  return tables;
}

function makeCosts(): Uint32Array {
  const costs = new Uint32Array(DECISION_TOTAL);
  for (let p = 1; p < DECISION_TOTAL; p++) costs[p] = MOST_BITS * COST_PER_BIT - integerLog2(p);
  return costs;
}

/** Parts of the fixed-point numbers that weights are computed from. */
const SCALE_BITS = 60n;
const ONE = 1n << SCALE_BITS;

function makeWeights(): Uint32Array {
  let root = 2n * ONE;
  for (let halvings = 1; halvings < STEPS_PER_BIT; halvings *= 2) root = squareRoot(root * ONE);
  const powers: bigint[] = [ONE];
  for (let step = 1; step < STEPS_PER_BIT; step++) {
    powers.push((powers[step - 1] * root) >> SCALE_BITS);
  }
  const unit = ONE << BigInt(MOST_BITS);
  return Uint32Array.from({ length: 2 * MOST_STEPS + 1 }, (_, i) => {
    const odds = powers[i % STEPS_PER_BIT] << BigInt(Math.floor(i / STEPS_PER_BIT));
    const all = odds + unit;
    return Number((odds * BigInt(DECISION_TOTAL) + all / 2n) / all);
  });
}

/** ⌊√value⌋ by Newton's rule from above. */
function squareRoot(value: bigint): bigint {
  let root = 1n << BigInt(Math.ceil(value.toString(2).length / 2));
  for (;;) {
    const next = (root + value / root) >> 1n;
    if (next >= root) return root;
    root = next;
  }
}
