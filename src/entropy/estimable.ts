import { millerMadowTerm } from './miller-madow.ts';

/** Largest Miller–Madow term, as a share of the plug-in entropy. */
const LARGEST_TERM_SHARE = 0.02;
/** Fewest positions for each free parameter (P − C), and for each context. */
const FEWEST_POSITIONS = 20;

/** What the rule looks at. */
export interface EstimableQuestion {
  readonly positions: number;
  readonly contexts: number;
  readonly pairs: number;
  /** Plug-in entropy, bits. */
  readonly entropyBits: number;
}

export interface EstimableVerdict {
  readonly estimable: boolean;
  /** The condition that fails first, or the margins where none does; half a sentence. */
  readonly reason: string;
}

const figure = (value: number): string => (value >= 100 ? value.toFixed(0) : value.toPrecision(2));

/**
 * Whether the data suffice to state an entropy by counting: the Miller–Madow term is at most 2 % of it, and each context
 * and each free parameter was seen at least 20 times. Where contexts determine the symbol (P = C, entropy 0) only the
 * contexts must have been seen often enough: constant data are estimable from 20 positions on.
 *
 * The rule for an order also asks every lower order to be estimable; {@link estimableOrders} adds that.
 */
export function judgeEstimable(question: EstimableQuestion): EstimableVerdict {
  const { positions, contexts, pairs, entropyBits } = question;
  const refuse = (reason: string): EstimableVerdict => ({ estimable: false, reason });
  if (positions === 0) return refuse('no position has that many predecessors');
  const perContext = positions / contexts;
  if (perContext < FEWEST_POSITIONS) {
    return refuse(
      `${figure(perContext)} symbols for each context seen, ${FEWEST_POSITIONS} are needed`,
    );
  }
  const free = pairs - contexts;
  if (positions < FEWEST_POSITIONS * free) {
    return refuse(
      `${figure(positions / free)} symbols for each free parameter, ${FEWEST_POSITIONS} are needed`,
    );
  }
  const term = millerMadowTerm(question);
  const share = term === 0 ? 0 : term / entropyBits;
  if (term > LARGEST_TERM_SHARE * entropyBits) {
    return refuse(`the bias correction is ${figure(share * 100)} % of the entropy, 2 % is allowed`);
  }
  const correction = share === 0 ? 'no' : `a ${figure(share * 100)} %`;
  return {
    estimable: true,
    reason: `${figure(perContext)} symbols for each context seen, ${correction} bias correction`,
  };
}

/** The verdict for each order, lowest first: one that fails makes all higher ones fail. */
export function estimableOrders(questions: readonly EstimableQuestion[]): EstimableVerdict[] {
  let lowerOrder: number | undefined;
  return questions.map((question, order) => {
    const verdict: EstimableVerdict =
      lowerOrder === undefined
        ? judgeEstimable(question)
        : { estimable: false, reason: `order ${lowerOrder} is not estimable already` };
    if (!verdict.estimable) lowerOrder ??= order;
    return verdict;
  });
}

/**
 * The same rule for symbols coded in blocks: one context, and `distinct` different blocks among those seen.
 * @param blocks       blocks seen
 * @param entropyBits  plug-in entropy of a block, bits
 */
export function blockEstimable(blocks: number, distinct: number, entropyBits: number): boolean {
  return judgeEstimable({
    positions: blocks,
    contexts: blocks === 0 ? 0 : 1,
    pairs: distinct,
    entropyBits,
  }).estimable;
}
