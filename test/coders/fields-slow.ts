/**
 * A second, slow computation of what `fields` prices, from the description of the method: maps and
 * plain numbers, nothing shared with the coder but the words of a choice. Records of one-byte
 * unsigned fields only.
 */

export interface SlowField {
  readonly transform: 'raw' | 'delta' | 'xor' | 'delta2';
  readonly context: 'none' | 'last' | 'value' | number;
}

/** What both ends know beforehand. */
export interface SlowFacts {
  readonly reference: number;
  readonly bounds: readonly number[];
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
      const { transform, context } = fields[f];
      const before = i >= 1 ? records[i - 1][f] : 0;
      const slope = i >= 2 ? before - records[i - 2][f] : 0;
      let residual: number;
      let table: string;
      if (i === 0) {
        residual = zigzag(value - facts[f].reference);
        table = 'first';
      } else {
        if (transform === 'raw') residual = value;
        else if (transform === 'xor') residual = value ^ before;
        else residual = zigzag(value - before - (transform === 'delta2' ? slope : 0));
        if (context === 'none') table = 'only';
        else if (context === 'last')
          table = i === 1 ? 'none yet' : `last ${sizeClass(residuals[i - 1][f])}`;
        else if (context === 'value')
          table = `value ${facts[f].bounds.filter((bound) => before >= bound).length}`;
        else table = `asked ${sizeClass(residuals[i][context])}`;
      }
      residuals[i].push(residual);
      steps.push({ field: f, table, ...tokenAndExtra(residual) });
    });
  });
  return steps;
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
