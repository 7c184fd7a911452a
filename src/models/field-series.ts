import type { FieldChoice, FieldContext } from '../symbols/field-choice.ts';
import { type FieldColumns, factsOf } from './field-columns.ts';
import { fitWeights, NormalEquations } from './field-least-squares.ts';
import { CONSTANT, columnsOfInputs, linearRows, WEIGHT_ONE, weightCount } from './field-linear.ts';
import {
  BOUNDS,
  contextKindOf,
  type FieldFacts,
  orderedValue,
  weightClassesOf,
} from './field-plan.ts';
import { residualOf, TRANSFORM_CODES, zigzagBetween } from './field-residual.ts';
import { bucketOf, tokenOf } from './field-token.ts';

/** What is left of each value of a part under a transform; of a message's first record nothing. */
export interface Residuals {
  readonly tokens: Uint8Array;
  readonly buckets: Uint8Array;
}

/** The columns of a train split as coding sees them: residuals, and classes of contexts. */
export class FieldSeries {
  readonly columns: FieldColumns;
  readonly facts: FieldFacts[];
  readonly #classes: (Uint8Array | undefined)[] = [];
  readonly #classesBefore: (Uint8Array | undefined)[] = [];
  /** Size classes of residuals of parts that are decided. */
  readonly #buckets: Uint8Array[] = [];

  /** @param known  the records that say what is known beforehand */
  constructor(columns: FieldColumns, known: Uint32Array) {
    this.columns = columns;
    this.facts = columns.values.map((_, part) => factsOf(columns, part, known));
  }

  /** Sets how a part is coded, for contexts of later parts. */
  decide(part: number, residuals: Residuals): void {
    this.#buckets[part] = residuals.buckets;
  }

  /** Residuals under a transform other than `linear`. */
  plain(part: number, transform: FieldChoice['transform']): Residuals {
    const { ages, layout } = this.columns;
    const code = TRANSFORM_CODES[transform];
    const values = this.columns.values[part];
    const shift = 32 - layout.widths[part];
    const signed = layout.signed[part];
    const residuals = new Uint32Array(values.length);
    for (let i = 0; i < values.length; i++) {
      if (ages[i] === 0) continue;
      const beforeThat = values[ages[i] === 1 ? i - 1 : i - 2];
      residuals[i] = residualOf(code, values[i], values[i - 1], beforeThat, shift, signed);
    }
    return tokensOf(residuals);
  }

  /**
   * Residuals under `linear`.
   * @param classes  of weights, one a record; absent: one for all
   */
  linear(
    part: number,
    inputs: readonly number[],
    weights: Int16Array,
    classes: Uint8Array | undefined,
  ): Residuals {
    const { ages, layout, numbers, values } = this.columns;
    const shift = 32 - layout.widths[part];
    const own = numbers[part];
    const each = weightCount(inputs.length);
    const residuals = new Uint32Array(own.length);
    for (let i = 0; i < own.length; i++) {
      if (ages[i] === 0) continue;
      const two = ages[i] === 1 ? i - 1 : i - 2;
      let at = classes === undefined ? 0 : each * classes[i];
      let sum = CONSTANT * weights[at++];
      sum += (own[i - 1] - own[two]) * weights[at++];
      for (let k = 0; k < inputs.length; k++) {
        const other = numbers[inputs[k]];
        const change = inputs[k] < part ? other[i] - other[i - 1] : other[i - 1] - other[two];
        sum += change * weights[at++];
        sum += (other[i - 1] - own[i - 1]) * weights[at++];
      }
      const expected = own[i - 1] + Math.floor((sum + WEIGHT_ONE / 2) / WEIGHT_ONE);
      residuals[i] = zigzagBetween(values[part][i], expected, shift);
    }
    return tokensOf(residuals);
  }

  /** Tokens of values, were each a message's first. */
  firstTokens(part: number, reference: number, beside: number | undefined): Uint8Array {
    const { layout, numbers, values } = this.columns;
    const shift = 32 - layout.widths[part];
    const tokens = new Uint8Array(values[part].length);
    for (let i = 0; i < tokens.length; i++) {
      const expected = reference + (beside === undefined ? 0 : numbers[beside][i]);
      tokens[i] = tokenOf(zigzagBetween(values[part][i], expected, shift));
    }
    return tokens;
  }

  /**
   * The class of each record's context, as far as it does not hang on the part's own residuals;
   * undefined where there is but one. A message's first record has none.
   */
  contextClasses(part: number, context: FieldContext): Uint8Array | undefined {
    const { names } = this.columns.layout;
    const asked = 'name' in context ? names.indexOf(context.name) : part;
    switch (context.kind) {
      case 'field':
        return this.#buckets[asked];
      case 'at':
        return this.#classesOf(asked);
      case 'value':
      case 'was':
        this.#classesBefore[asked] ??= shifted(this.#classesOf(asked));
        return this.#classesBefore[asked];
      default:
        return undefined;
    }
  }

  #classesOf(part: number): Uint8Array {
    const known = this.#classes[part];
    if (known !== undefined) return known;
    const { layout, values } = this.columns;
    const { bounds } = this.facts[part];
    const classes = Uint8Array.from(values[part], (unordered) => {
      const value = orderedValue(unordered, layout.widths[part], layout.signed[part]);
      let reached = 0;
      while (reached < BOUNDS && value >= bounds[reached]) reached++;
      return reached;
    });
    this.#classes[part] = classes;
    return classes;
  }
}

function tokensOf(residuals: Uint32Array): Residuals {
  const tokens = new Uint8Array(residuals.length);
  const buckets = new Uint8Array(residuals.length);
  for (let i = 0; i < residuals.length; i++) {
    tokens[i] = tokenOf(residuals[i]);
    buckets[i] = bucketOf(residuals[i]);
  }
  return { tokens, buckets };
}

/** Of each record that of the one before. */
function shifted(classes: Uint8Array): Uint8Array {
  const before = new Uint8Array(classes.length);
  for (let i = 1; i < classes.length; i++) before[i] = classes[i - 1];
  return before;
}

/**
 * What both ends know beforehand of each part under its choice, from all records: references,
 * bounds of classes, weights.
 */
export function trainedFacts(
  columns: FieldColumns,
  choices: readonly FieldChoice[],
): readonly FieldFacts[] {
  const { names } = columns.layout;
  const all = Uint32Array.from({ length: columns.recordCount }, (_, record) => record);
  const series = new FieldSeries(columns, all);
  return choices.map((choice, part) => {
    const facts =
      choice.first === undefined
        ? series.facts[part]
        : factsOf(columns, part, all, names.indexOf(choice.first));
    if (choice.transform !== 'linear') {
      series.decide(part, series.plain(part, choice.transform));
      return facts;
    }
    const inputs = (choice.inputs ?? []).map((name) => names.indexOf(name));
    const classes = series.contextClasses(part, choice.context);
    const rows = linearRows(columns, part, inputs, all);
    const classCount = weightClassesOf(contextKindOf(choice));
    const equations = new NormalEquations(rows, classes, classCount);
    const { weights } = equations.solve(columnsOfInputs(inputs.map((_, place) => place)));
    const rounded = fitWeights(rows, classes, classCount, weights);
    series.decide(part, series.linear(part, inputs, rounded, classes));
    return { ...facts, weights: rounded };
  });
}
