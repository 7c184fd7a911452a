/**
 * The small language in which exported encoders and decoders are written once and printed as C and as TypeScript.
 *
 * Every value is an unsigned 32-bit integer; sums, differences, products and left shifts wrap. Comparisons and what joins them
 * are conditions, which only `if` and `while` take. Names in capitals are constants; arrays are tables or buffers; state lives
 * between calls. Nothing can be allocated, and a printed function that calls itself is refused.
 */
export type Expression =
  | { readonly kind: 'number'; readonly value: number }
  | { readonly kind: 'name'; readonly name: string }
  | { readonly kind: 'index'; readonly array: string; readonly index: Expression }
  | { readonly kind: 'call'; readonly name: string; readonly args: readonly Expression[] }
  | { readonly kind: 'not'; readonly operand: Expression }
  | {
      readonly kind: 'binary';
      readonly op: BinaryOperator;
      readonly left: Expression;
      readonly right: Expression;
    };

/** Operators by how tightly they bind, loosest first. `/` and `%` are those of whole numbers. */
export const PRECEDENCE = [
  ['||'],
  ['&&'],
  ['|'],
  ['^'],
  ['&'],
  ['==', '!='],
  ['<', '<=', '>', '>='],
  ['<<', '>>'],
  ['+', '-'],
  ['*', '/', '%'],
] as const;

export type BinaryOperator = (typeof PRECEDENCE)[number][number];

export type Statement =
  | { readonly kind: 'let'; readonly name: string; readonly value: Expression }
  | { readonly kind: 'assign'; readonly name: string; readonly value: Expression }
  | {
      readonly kind: 'store';
      readonly array: string;
      readonly index: Expression;
      readonly value: Expression;
    }
  | {
      readonly kind: 'if';
      readonly condition: Expression;
      readonly then: readonly Statement[];
      readonly otherwise: readonly Statement[];
    }
  | {
      readonly kind: 'while';
      readonly condition: Expression;
      readonly body: readonly Statement[];
    }
  | { readonly kind: 'return'; readonly value: Expression }
  | { readonly kind: 'call'; readonly call: Expression & { kind: 'call' } }
  | { readonly kind: 'comment'; readonly text: string };

/** A function that gives one value; 0 where its end is reached. */
export interface LanguageFunction {
  readonly name: string;
  /** Lines before it. */
  readonly comment: readonly string[];
  readonly parameters: readonly string[];
  readonly body: readonly Statement[];
}

/** Functions and the state they share. */
export interface LanguageProgram {
  readonly state: readonly string[];
  /** Arrays that are part of the state, and their lengths. */
  readonly stateArrays: ReadonlyMap<string, number>;
  readonly functions: ReadonlyMap<string, LanguageFunction>;
}

/** An array outside the program: a table, or a buffer of the caller. */
export interface LanguageArray {
  readonly name: string;
  /** Bytes of an element: 1, 2 or 4. */
  readonly elementBytes: 1 | 2 | 4;
  /** Absent for buffers. */
  readonly values?: ArrayLike<number>;
  /** What it holds, in words. */
  readonly comment?: string;
}

const CONDITIONS: ReadonlySet<string> = new Set(['||', '&&', '==', '!=', '<', '<=', '>', '>=']);

/** Whether an expression is a condition rather than a number. */
export function isCondition(expression: Expression): boolean {
  return (
    expression.kind === 'not' || (expression.kind === 'binary' && CONDITIONS.has(expression.op))
  );
}

/** The functions that `entry` reaches, each after those it calls. */
export function reachableFunctions(
  program: LanguageProgram,
  entry: string,
): readonly LanguageFunction[] {
  const done: LanguageFunction[] = [];
  const open = new Set<string>();
  const visit = (name: string): void => {
    if (done.some((f) => f.name === name)) return;
    const found = program.functions.get(name);
    if (found === undefined) throw new Error(`the export program has no function ${name}`);
    if (open.has(name)) throw new Error(`the export program calls ${name} from itself`);
    open.add(name);
    for (const called of calledBy(found)) visit(called);
    open.delete(name);
    done.push(found);
  };
  visit(entry);
  return done;
}

/** Every expression and name in a function, in order. */
export function walkFunction(
  { body }: LanguageFunction,
  visit: { expression?: (e: Expression) => void; written?: (name: string) => void },
): void {
  const expression = (e: Expression): void => {
    visit.expression?.(e);
    if (e.kind === 'index') expression(e.index);
    else if (e.kind === 'call') e.args.forEach(expression);
    else if (e.kind === 'not') expression(e.operand);
    else if (e.kind === 'binary') {
      expression(e.left);
      expression(e.right);
    }
  };
  const statement = (s: Statement): void => {
    if (s.kind === 'let' || s.kind === 'return') expression(s.value);
    else if (s.kind === 'assign') {
      visit.written?.(s.name);
      expression(s.value);
    } else if (s.kind === 'store') {
      visit.written?.(s.array);
      expression(s.index);
      expression(s.value);
    } else if (s.kind === 'call') expression(s.call);
    else if (s.kind === 'if') {
      expression(s.condition);
      s.then.forEach(statement);
      s.otherwise.forEach(statement);
    } else if (s.kind === 'while') {
      expression(s.condition);
      s.body.forEach(statement);
    }
  };
  body.forEach(statement);
}

/** Names of functions that a function calls. */
function calledBy(called: LanguageFunction): ReadonlySet<string> {
  const names = new Set<string>();
  walkFunction(called, { expression: (e) => e.kind === 'call' && names.add(e.name) });
  return names;
}

/** Names that a function reads or writes: variables, state, constants, arrays. */
export function namesIn(called: LanguageFunction): ReadonlySet<string> {
  const names = new Set<string>();
  walkFunction(called, {
    expression: (e) => {
      if (e.kind === 'name') names.add(e.name);
      else if (e.kind === 'index') names.add(e.array);
    },
    written: (name) => names.add(name),
  });
  return names;
}
