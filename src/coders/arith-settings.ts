import { InputError } from '../errors/errors.ts';
import { type AddedCount, AdditiveModel } from '../models/additive-model.ts';
import { BackOffModel } from '../models/back-off-model.ts';
import { LARGEST_TOTAL } from '../models/interval.ts';
import type { Unseen } from '../models/static-table.ts';
import type { AdaptiveModel } from '../models/symbol-model.ts';
import type { RangeBits } from '../stages/range-precision.ts';
import type { Declaration, Setup } from './contract.ts';
import { type ParameterValues, parseRational } from './parameters.ts';

/** Largest alphabet under `learned` for additive counts. */
const LARGEST_ADDITIVE_LEARNED = 4096;

export const arithDeclaration: Declaration = {
  name: 'arith',
  summary:
    'Arithmetic coding of each symbol in its order-k context: adaptive with back-off, or static tables.',
  parameters: [
    {
      key: 'order',
      kind: 'integer',
      min: 0,
      max: 8,
      summary: 'symbols before that are the context',
    },
    {
      key: 'position',
      kind: 'integer',
      min: 1,
      max: 65_536,
      standard: 1,
      summary:
        'record length N: contexts also know the index in the message modulo N, kept when backing off; 1: they do not',
    },
    {
      key: 'backoff',
      kind: 'word',
      words: ['c', 'none'],
      standard: 'c',
      summary:
        'learned, primed: escape to lower orders by method C with exclusion, or additive counts of order k alone',
    },
    {
      key: 'counts',
      kind: 'word',
      words: ['kt', 'laplace', 'add:X'],
      standard: 'kt',
      summary: 'with backoff=none: what is added to every count (kt 1/2, laplace 1)',
    },
    {
      key: 'halve_at',
      kind: 'integer',
      min: 16,
      max: LARGEST_TOTAL,
      optional: true,
      summary:
        'learned, primed: total at which a context is halved; with back-off 2^13 or 32 m, else 2^22 (2^16 with range=32)',
    },
    {
      key: 'total_bits',
      kind: 'integer',
      min: 3,
      max: 22,
      optional: true,
      summary:
        'shipped, sent: frequencies add up to 2^total_bits; 14, or ⌈log2 m⌉ + 2 where that is more',
    },
    {
      key: 'unseen',
      kind: 'word',
      words: ['escape', 'add:X'],
      standard: 'escape',
      summary: 'shipped: symbols never trained escape to lower orders, or every symbol gets X more',
    },
    {
      key: 'range',
      kind: 'word',
      words: ['48', '32'],
      standard: '48',
      summary: 'bits of the coding interval: 48 loses nothing, 32 fits small devices',
    },
  ],
  policies: ['shipped', 'sent', 'learned', 'primed'],
  resets: ['message', 'file', 'never'],
  needsWholeMessage: false,
  reference: false,
  maxAlphabetSize: 65_536,
  worstCase: 'learned: about (k + 2) · 22 bits a symbol and 2 bits a message beside the tables',
  memory:
    'about 25 bytes a context met and 4 to 8 a further symbol of it, at most 900 MiB; learned and primed also 33 bytes a symbol of the alphabet for each position met; sent with reset message: the message too',
  source:
    'G. N. N. Martin 1979; A. Moffat 1990 (method C); R. Krichevsky, V. Trofimov 1981; J. G. Cleary, I. H. Witten 1984',
};

/** A candidate's parameters, and the choices that follow from them for an alphabet. */
export class ArithSettings {
  readonly order: number;
  /** N: contexts know the position modulo N. */
  readonly positions: number;
  readonly rangeBits: RangeBits;
  readonly unseen: Unseen;
  /** Undefined: back-off. */
  readonly added: AddedCount | undefined;
  readonly #halveAt: number | undefined;
  readonly #totalBits: number | undefined;

  /** Throws InputError where parameters contradict one another. */
  constructor(values: ParameterValues) {
    this.order = Number(values['order']);
    this.positions = Number(values['position']);
    this.rangeBits = values['range'] === '32' ? 32 : 48;
    if (values['backoff'] === 'c' && values['counts'] !== 'kt') {
      throw new InputError('arith: counts= means nothing with back-off', {
        coder: 'arith',
        key: 'counts',
        advice: 'Add backoff=none for additive counts, or leave counts= out.',
      });
    }
    this.added = values['backoff'] === 'none' ? addedCountOf(String(values['counts'])) : undefined;
    const unseen = String(values['unseen']);
    this.unseen = unseen === 'escape' ? 'escape' : { add: addedCountOf(unseen) };
    this.#halveAt = values['halve_at'] as number | undefined;
    this.#totalBits = values['total_bits'] as number | undefined;
  }

  /** log2 of the total of static frequencies. */
  totalBits(alphabetSize: number): number {
    return this.#totalBits ?? Math.max(14, leastTotalBits(alphabetSize));
  }

  /**
   * Total at which a context's counts are halved. Additive counts keep all they can by default, so that they are the
   * estimator they are named after; a range of 32 bits is spared the hundredths of a bit that large totals would cost it.
   * Back-off forgets by default: against 2^22, 2^13 cost at most 0.3 % and gained up to 4 % on four files at orders 0, 1, 2 and 4.
   */
  halveAt(alphabetSize: number): number {
    if (this.#halveAt !== undefined) return this.#halveAt;
    if (this.added === undefined)
      return Math.min(LARGEST_TOTAL, Math.max(2 ** 13, 32 * alphabetSize));
    if (this.rangeBits === 48) return LARGEST_TOTAL;
    const { p, q } = this.added;
    return Math.min(LARGEST_TOTAL, Math.max(2 ** 16, 2 * (p * alphabetSize + 2 * q)));
  }

  /** A model that has learned nothing. */
  newModel(alphabetSize: number): AdaptiveModel {
    const halveAt = this.halveAt(alphabetSize);
    return this.added === undefined
      ? new BackOffModel(alphabetSize, this.order, halveAt, this.positions)
      : new AdditiveModel(alphabetSize, this.order, this.added, halveAt, this.positions);
  }

  /** Throws InputError when the setup cannot work with these parameters. */
  check(setup: Setup): void {
    const { alphabetSize, policy } = setup;
    if (alphabetSize > arithDeclaration.maxAlphabetSize) {
      this.#refuse('alphabet', `at most ${arithDeclaration.maxAlphabetSize} symbols`, alphabetSize);
    }
    if (policy === 'shipped' || policy === 'sent') {
      const least = leastTotalBits(alphabetSize);
      if (this.totalBits(alphabetSize) < least) {
        this.#refuse(
          'total_bits',
          `at least ${least} for an alphabet of ${alphabetSize}, so that every symbol keeps a frequency`,
          this.totalBits(alphabetSize),
        );
      }
      return;
    }
    if (policy === 'none') this.#refuse('tables', arithDeclaration.policies.join(', '), policy);
    const halveAt = this.halveAt(alphabetSize);
    if (this.added === undefined) {
      if (halveAt < 3 * alphabetSize) {
        this.#refuse('halve_at', `at least 3 · ${alphabetSize}, three times the alphabet`, halveAt);
      }
      return;
    }
    if (policy === 'learned' && alphabetSize > LARGEST_ADDITIVE_LEARNED) {
      throw new InputError(
        `arith: additive counts that start from nothing are no use for ${alphabetSize} symbols: what is added to symbols never met outweighs all that a context can learn`,
        {
          coder: 'arith',
          key: 'backoff',
          expected: `at most ${LARGEST_ADDITIVE_LEARNED} symbols under learned`,
          got: String(alphabetSize),
          advice: 'Leave backoff=none out, or use it under primed.',
        },
      );
    }
    const { p, q } = this.added;
    if (p * alphabetSize + 2 * q > halveAt) {
      this.#refuse(
        'halve_at',
        `at least ${p * alphabetSize + 2 * q}: counts enter as ${q}·c + ${p}, for ${alphabetSize} symbols`,
        halveAt,
      );
    }
  }

  #refuse(key: string, expected: string, got: number | string): never {
    throw new InputError(`arith: the value of ${key} does not fit these symbols`, {
      coder: 'arith',
      key,
      expected,
      got: String(got),
    });
  }
}

/** Room for every symbol, an escape, and some precision above. */
function leastTotalBits(alphabetSize: number): number {
  return 2 + (alphabetSize === 1 ? 0 : 32 - Math.clz32(alphabetSize - 1));
}

function addedCountOf(word: string): AddedCount {
  if (word === 'kt') return { p: 1, q: 2 };
  if (word === 'laplace') return { p: 1, q: 1 };
  return parseRational(word.slice('add:'.length))!;
}
