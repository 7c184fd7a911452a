/**
 * A second, slow computation of what `fields` prices, from the description of the method: maps and
 * plain numbers, nothing shared with the coder but the words of a choice. Records of one-byte
 * unsigned fields only.
 */

export interface SlowField {
  readonly transform: 'raw' | 'delta' | 'xor' | 'delta2' | 'linear';
  /** Fields that `linear` asks. */
  readonly inputs?: readonly number[];
  readonly context:
    | 'none'
    | 'last'
    | 'value'
    | { readonly kind: 'field' | 'at' | 'was'; readonly of: number };
  /** The field beside which a first value is coded. */
  readonly first?: number;
}

/** What both ends know beforehand. */
export interface SlowFacts {
  readonly reference: number;
  readonly bounds: readonly number[];
  /** Of `linear`, in 1/4096, by class of the context: constant (of 256), own change, and two an input. */
  readonly weights?: readonly number[];
}

const zigzag = (difference: number) => {
  const wrapped = ((((difference + 128) % 256) + 256) % 256) - 128;
  return wrapped >= 0 ? 2 * wrapped : -2 * wrapped - 1;
};

/** 0 to 15 are themselves; above, bit length and the bit below the leading one make the token. */
function tokenAndExtra(residual: number): { token: number; extraBits: number } {
  if (residual < 16) return { token: residual, extraBits: 0 };
  const binary = residual.toString(2);
  return {
    token: 16 + 2 * (binary.length - 5) + Number(binary[1]),
    extraBits: binary.length - 2,
  };
}

const sizeClass = (residual: number) =>
  Math.min(7, residual === 0 ? 0 : residual.toString(2).length);

/** One coded field: the table by name, its token and the extra bits. */
export interface SlowStep {
  readonly field: number;
  readonly table: string;
  readonly token: number;
  readonly extraBits: number;
}

/** The steps of one message, given as records of field values. */
export function slowSteps(
  records: readonly (readonly number[])[],
  fields: readonly SlowField[],
  facts: readonly SlowFacts[],
): SlowStep[] {
  const steps: SlowStep[] = [];
  const residuals: number[][] = [];
  records.forEach((record, i) => {
    residuals.push([]);
    record.forEach((value, f) => {
      const { transform, context, first } = fields[f];
      const before = i >= 1 ? records[i - 1][f] : 0;
      const slope = i >= 2 ? before - records[i - 2][f] : 0;
      let residual: number;
      let table: string;
      if (i === 0) {
        const { reference } = facts[f];
        residual = zigzag(value - reference - (first === undefined ? 0 : record[first]));
        table = 'first';
      } else {
        const classOf = (of: number, at: number) =>
          facts[of].bounds.filter((bound) => records[at][of] >= bound).length;
        let contextClass = 0;
        if (context === 'none') table = 'only';
        else if (context === 'last')
          table = i === 1 ? 'none yet' : `last ${sizeClass(residuals[i - 1][f])}`;
        else {
          if (context === 'value') contextClass = classOf(f, i - 1);
          else if (context.kind === 'field') contextClass = sizeClass(residuals[i][context.of]);
          else contextClass = classOf(context.of, context.kind === 'at' ? i : i - 1);
          table = `class ${contextClass}`;
        }
        if (transform === 'raw') residual = value;
        else if (transform === 'xor') residual = value ^ before;
        else if (transform === 'linear')
          residual = zigzag(
            value - before - linearChange(records, i, f, fields[f], facts[f], contextClass),
          );
        else residual = zigzag(value - before - (transform === 'delta2' ? slope : 0));
      }
      residuals[i].push(residual);
      steps.push({ field: f, table, ...tokenAndExtra(residual) });
    });
  });
  return steps;
}

/** The change of field `f` that `linear` expects in record `i`. */
function linearChange(
  records: readonly (readonly number[])[],
  i: number,
  f: number,
  { inputs = [] }: SlowField,
  { weights = [] }: SlowFacts,
  contextClass: number,
): number {
  const changeOf = (field: number, at: number) =>
    at >= 1 ? records[at][field] - records[at - 1][field] : 0;
  const terms = [
    256,
    changeOf(f, i - 1),
    ...inputs.flatMap((input) => [
      changeOf(input, input < f ? i : i - 1),
      records[i - 1][input] - records[i - 1][f],
    ]),
  ];
  const own = weights.slice(terms.length * contextClass);
  const sum = terms.reduce((total, term, k) => total + term * (own[k] ?? 0), 0);
  return Math.round(sum / 4096);
}

/** Tokens of a field of eight bits: 16, and two for each of the bit lengths 5 to 8. */
const TOKENS = 24;

/**
 * Probability of each step after training on `train`, times 2^−extra, as the smoothing is
 * described.
 */
export function slowTrainedBits(
  train: readonly SlowStep[],
  steps: readonly SlowStep[],
  fields: readonly SlowField[],
): number[] {
  const count = (field: number, table: string | undefined, token: number | undefined) =>
    train.filter(
      (step) =>
        step.field === field &&
        (table === undefined ? step.table !== 'first' : step.table === table) &&
        (token === undefined || step.token === token),
    ).length;
  const weight = (field: number, table: string, token: number): number => {
    const own = 1024 * count(field, table, token);
    if (table === 'first' || fields[field].context === 'none') return own + 1024 / 8;
    const common = 16 * count(field, undefined, token) + 1;
    const all = 16 * count(field, undefined, undefined) + TOKENS;
    return own + 1 + Math.floor((4 * 1024 * common) / all);
  };
  return steps.map(({ field, table, token, extraBits }) => {
    let total = 0;
    for (let t = 0; t < TOKENS; t++) total += weight(field, table, t);
    return Math.log2(total / weight(field, table, token)) + extraBits;
  });
}

/**
 * Bits of each step with counts that grow from 1 by 16; a table whose counts pass 2^15 in all is
 * halved, each count rounded up.
 */
export function slowLearnedBits(steps: readonly SlowStep[]): number[] {
  const tables = new Map<string, number[]>();
  const sum = (counts: readonly number[]) => counts.reduce((a, b) => a + b, 0);
  return steps.map(({ field, table, token, extraBits }) => {
    const name = `${field}: ${table}`;
    const counts = tables.get(name) ?? new Array<number>(TOKENS).fill(1);
    const bits = Math.log2(sum(counts) / counts[token]) + extraBits;
    counts[token] += 16;
    const halved = sum(counts) > 2 ** 15 ? counts.map((count) => Math.ceil(count / 2)) : counts;
    tables.set(name, halved);
    return bits;
  });
}
