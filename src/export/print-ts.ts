import { BugError } from '../errors/errors.ts';
import {
  type Expression,
  isCondition,
  type LanguageArray,
  type LanguageFunction,
  namesIn,
  reachableFunctions,
  type Statement,
} from './language.ts';
import { type PrintContext, valuedFunctions } from './print-c.ts';

/** Prints the functions that `entry` reaches as functions of a TypeScript module with state of its own. */
export class TsPrinter {
  readonly functions: readonly LanguageFunction[];
  readonly #valued: ReadonlySet<string>;

  constructor(context: PrintContext) {
    this.functions = reachableFunctions(context.program, context.entry);
    this.#valued = valuedFunctions(this.functions, context);
  }

  get used(): ReadonlySet<string> {
    return new Set(this.functions.flatMap((f) => [...namesIn(f)]));
  }

  print(): string {
    return this.functions.map((f) => this.#function(f)).join('\n');
  }

  #function(f: LanguageFunction): string {
    const valued = this.#valued.has(f.name);
    const lines = [
      ...f.comment.map((line) => `// ${line}`),
      `function ${f.name}(${f.parameters.map((p) => `${p}: number`).join(', ')}): ${valued ? 'number' : 'void'} {`,
      ...this.#block(f.body, '  ', valued),
    ];
    if (valued && f.body.at(-1)?.kind !== 'return') lines.push('  return 0;');
    return `${[...lines, '}'].join('\n')}\n`;
  }

  #block(body: readonly Statement[], indent: string, valued: boolean): string[] {
    return body.flatMap((s) => this.#statement(s, indent, valued));
  }

  #statement(s: Statement, indent: string, valued: boolean): string[] {
    switch (s.kind) {
      case 'comment':
        return [`${indent}// ${s.text}`];
      case 'let':
        return [`${indent}let ${s.name} = ${number(s.value)};`];
      case 'assign':
        return [`${indent}${s.name} = ${number(s.value)};`];
      case 'store':
        return [`${indent}${s.array}[${number(s.index)}] = ${number(s.value)};`];
      case 'return':
        return [`${indent}return${valued ? ` ${number(s.value)}` : ''};`];
      case 'call':
        return [`${indent}${number(s.call)};`];
      case 'while':
        return [
          `${indent}while (${condition(s.condition)}) {`,
          ...this.#block(s.body, `${indent}  `, valued),
          `${indent}}`,
        ];
      case 'if':
        return [
          `${indent}if (${condition(s.condition)}) {`,
          ...this.#block(s.then, `${indent}  `, valued),
          ...(s.otherwise.length === 0
            ? []
            : [`${indent}} else {`, ...this.#block(s.otherwise, `${indent}  `, valued)]),
          `${indent}}`,
        ];
    }
  }
}

function condition(e: Expression): string {
  if (e.kind === 'not') return `!(${condition(e.operand)})`;
  if (e.kind !== 'binary' || !isCondition(e)) throw new BugError('a number is no condition');
  if (e.op === '&&' || e.op === '||')
    return `(${condition(e.left)}) ${e.op} (${condition(e.right)})`;
  const op = e.op === '==' || e.op === '!=' ? `${e.op}=` : e.op;
  return `${number(e.left)} ${op} ${number(e.right)}`;
}

/** A whole number of 32 bits: wherever JavaScript would leave that range, it is brought back. */
function number(e: Expression): string {
  switch (e.kind) {
    case 'number':
      return String(e.value);
    case 'name':
      return e.name;
    case 'index':
      return `${e.array}[${number(e.index)}]`;
    case 'call':
      return `${e.name}(${e.args.map(number).join(', ')})`;
    case 'binary':
      if (!isCondition(e)) return binary(e);
  }
  throw new BugError('a condition is no number');
}

function binary({ op, left, right }: Expression & { kind: 'binary' }): string {
  const [a, b] = [number(left), number(right)];
  switch (op) {
    case '*':
      return `(Math.imul(${a}, ${b}) >>> 0)`;
    case '/':
      return `((${a} / ${b}) >>> 0)`;
    case '%':
      return `(${a} % ${b})`;
    case '>>':
      return `(${a} >>> ${b})`;
    default:
      return `((${a} ${op} ${b}) >>> 0)`;
  }
}

const ARRAYS = { 1: 'Uint8Array', 2: 'Uint16Array', 4: 'Uint32Array' } as const;

/** A table as a typed array. */
export function tableTextTs({ name, elementBytes, values, comment }: LanguageArray): string {
  if (values === undefined) throw new BugError(`${name} is a buffer`);
  const doc = comment === undefined ? '' : `// ${comment}\n`;
  return `${doc}const ${name} = new ${ARRAYS[elementBytes]}([${Array.from(values).join(', ')}]);\n`;
}

/** The type of a buffer's array. */
export const arrayTypeTs = (elementBytes: 1 | 2 | 4): string => ARRAYS[elementBytes];
