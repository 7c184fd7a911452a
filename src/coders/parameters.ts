import { InputError } from '../errors/errors.ts';
import { nearestWord } from '../errors/nearest.ts';

/**
 * How a parameter is declared.
 * - `integer`: min … max; a candidate may give a range `a..b`.
 * - `word`: one of `words`; a word that ends in `:X` takes a positive rational after the colon (`add:1/256`, `add:0.05`). A
 *   `bare` one is written without its key.
 * - `text`: of a form that the coder reads itself; left out unless given. It holds no comma and no `=`.
 */
export type ParameterDeclaration =
  | {
      readonly key: string;
      readonly kind: 'integer';
      readonly min: number;
      readonly max: number;
      /** Absent: the parameter must be given. `undefined` in the values means "the coder chooses". */
      readonly standard?: number;
      readonly optional?: boolean;
      readonly summary: string;
    }
  | {
      readonly key: string;
      readonly kind: 'word';
      readonly words: readonly string[];
      readonly standard: string;
      readonly bare?: boolean;
      readonly summary: string;
    }
  | {
      readonly key: string;
      readonly kind: 'text';
      /** How it is written, in words. */
      readonly form: string;
      readonly example: string;
      readonly standard?: undefined;
      readonly summary: string;
    };

export type ParameterValue = number | string;
export type ParameterValues = Readonly<Record<string, ParameterValue>>;

/** A positive rational as two integers, p / q in lowest terms. */
export interface Rational {
  readonly p: number;
  readonly q: number;
}

function greatestCommonDivisor(a: number, b: number): number {
  return b === 0 ? a : greatestCommonDivisor(b, a % b);
}

/** Reads `3`, `0.05` or `1/256`; undefined when it is no positive rational with parts below 2^20. */
export function parseRational(text: string): Rational | undefined {
  let p: number;
  let q: number;
  const fraction = /^(\d{1,7})\/(\d{1,7})$/.exec(text);
  const decimal = /^(\d{0,6})\.?(\d{0,6})$/.exec(text);
  if (fraction) {
    p = Number(fraction[1]);
    q = Number(fraction[2]);
  } else if (decimal && text !== '' && text !== '.') {
    q = 10 ** decimal[2].length;
    p = Number(decimal[1] || '0') * q + Number(decimal[2] || '0');
  } else {
    return undefined;
  }
  if (p === 0 || q === 0) return undefined;
  const divisor = greatestCommonDivisor(p, q);
  if (p / divisor >= 2 ** 20 || q / divisor >= 2 ** 20) return undefined;
  return { p: p / divisor, q: q / divisor };
}

function refuse(coder: string, key: string, expected: string, got: string): never {
  throw new InputError(`${coder}: the value of ${key} is not allowed`, {
    coder,
    key,
    expected,
    got,
    advice: `bitassay coders ${coder} shows the parameters of ${coder}.`,
  });
}

function checkWord(
  coder: string,
  declaration: ParameterDeclaration & { kind: 'word' },
  text: string,
): string {
  for (const word of declaration.words) {
    if (!word.endsWith(':X')) {
      if (word === text) return text;
      continue;
    }
    const prefix = word.slice(0, -1);
    if (text.startsWith(prefix) && parseRational(text.slice(prefix.length)) !== undefined)
      return text;
  }
  return refuse(coder, declaration.key, declaration.words.join(' | '), text);
}

/**
 * Values of every declared parameter from the texts a candidate gives, defaults filled in. A parameter that is `optional`
 * and not given is left out.
 * @param otherKeys  keys that every coder takes, for the hint when a key is unknown
 * @throws InputError naming the key, what was expected and the nearest key
 */
export function resolveParameters(
  coder: string,
  declarations: readonly ParameterDeclaration[],
  given: Readonly<Record<string, string>>,
  otherKeys: readonly string[] = [],
): ParameterValues {
  const values: Record<string, ParameterValue> = {};
  for (const key of Object.keys(given)) {
    if (declarations.some((d) => d.key === key)) continue;
    const near = nearestWord(key, [...declarations.map((d) => d.key), ...otherKeys]);
    throw new InputError(`${coder} has no parameter ${key}`, {
      coder,
      key,
      expected:
        declarations.length === 0 ? 'no parameters' : declarations.map((d) => d.key).join(', '),
      ...(near === undefined ? {} : { advice: `Did you mean ${near}?` }),
    });
  }
  for (const declaration of declarations) {
    const text = given[declaration.key];
    if (declaration.kind === 'text') {
      if (text === '') refuse(coder, declaration.key, declaration.form, 'nothing');
      if (text !== undefined) values[declaration.key] = text;
      continue;
    }
    if (declaration.kind === 'word') {
      values[declaration.key] =
        text === undefined ? declaration.standard : checkWord(coder, declaration, text);
      continue;
    }
    const expected = `an integer from ${declaration.min} to ${declaration.max}`;
    if (text === undefined) {
      if (declaration.standard !== undefined) values[declaration.key] = declaration.standard;
      else if (declaration.optional !== true) refuse(coder, declaration.key, expected, 'nothing');
      continue;
    }
    const value = Number(text);
    if (!/^\d+$/.test(text) || value < declaration.min || value > declaration.max) {
      refuse(coder, declaration.key, expected, text);
    }
    values[declaration.key] = value;
  }
  return values;
}

/**
 * `key=value`, or the bare word, of every parameter that differs from its default, in declared order; parameters without
 * default always.
 */
export function writeParameters(
  declarations: readonly ParameterDeclaration[],
  values: ParameterValues,
): string {
  const parts: string[] = [];
  for (const declaration of declarations) {
    const value = values[declaration.key];
    if (value === undefined || value === declaration.standard) continue;
    const bare = declaration.kind === 'word' && declaration.bare === true;
    parts.push(bare ? String(value) : `${declaration.key}=${value}`);
  }
  return parts.join(',');
}
