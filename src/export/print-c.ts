import { BugError } from '../errors/errors.ts';
import {
  type Expression,
  isCondition,
  type LanguageArray,
  type LanguageFunction,
  type LanguageProgram,
  namesIn,
  reachableFunctions,
  type Statement,
  walkFunction,
} from './language.ts';

/** What a program is printed with. */
export interface PrintContext {
  readonly program: LanguageProgram;
  /** The function that everything else hangs on. */
  readonly entry: string;
  /** Whether the caller takes what `entry` gives. */
  readonly entryGives: boolean;
  /** Whole numbers below 2^32 by their names in capitals. */
  readonly constants: ReadonlyMap<string, number>;
  readonly tables: readonly LanguageArray[];
  /** Arrays of the caller: `in`, `out`, `symbols`. */
  readonly buffers: readonly LanguageArray[];
}

/** Names of functions whose value somebody takes; the others are printed as procedures. */
export function valuedFunctions(
  functions: readonly LanguageFunction[],
  { entry, entryGives }: PrintContext,
): ReadonlySet<string> {
  const valued = new Set<string>(entryGives ? [entry] : []);
  const inside = (e: Expression): void => {
    if (e.kind === 'call') {
      valued.add(e.name);
      e.args.forEach(inside);
    } else if (e.kind === 'index') inside(e.index);
    else if (e.kind === 'not') inside(e.operand);
    else if (e.kind === 'binary') {
      inside(e.left);
      inside(e.right);
    }
  };
  const statement = (s: Statement): void => {
    if (s.kind === 'call') s.call.args.forEach(inside);
    else if (s.kind === 'let' || s.kind === 'assign' || s.kind === 'return') inside(s.value);
    else if (s.kind === 'store') {
      inside(s.index);
      inside(s.value);
    } else if (s.kind === 'if') {
      inside(s.condition);
      s.then.forEach(statement);
      s.otherwise.forEach(statement);
    } else if (s.kind === 'while') {
      inside(s.condition);
      s.body.forEach(statement);
    }
  };
  for (const { body } of functions) body.forEach(statement);
  return valued;
}

/** Names of the program's functions that touch state or buffers, by themselves or through what they call. */
function statefulFunctions(
  functions: readonly LanguageFunction[],
  own: ReadonlySet<string>,
): ReadonlySet<string> {
  const stateful = new Set<string>();
  // Callees stand before their callers.
  for (const f of functions) {
    let touches = [...namesIn(f)].some((name) => own.has(name));
    walkFunction(f, {
      expression: (e) => {
        if (e.kind === 'call' && stateful.has(e.name)) touches = true;
      },
    });
    if (touches) stateful.add(f.name);
  }
  return stateful;
}

/** Prints the functions that `entry` reaches as static C99 functions over `struct state`. */
export class CPrinter {
  readonly functions: readonly LanguageFunction[];
  readonly #context: PrintContext;
  readonly #arrays: ReadonlyMap<string, LanguageArray>;
  readonly #members: ReadonlySet<string>;
  readonly #valued: ReadonlySet<string>;
  readonly #stateful: ReadonlySet<string>;

  constructor(context: PrintContext) {
    this.#context = context;
    const { program, tables, buffers } = context;
    this.functions = reachableFunctions(program, context.entry);
    this.#arrays = new Map([...tables, ...buffers].map((a) => [a.name, a]));
    this.#members = new Set([
      ...program.state,
      ...program.stateArrays.keys(),
      ...buffers.map((b) => b.name),
    ]);
    this.#valued = valuedFunctions(this.functions, context);
    this.#stateful = statefulFunctions(this.functions, this.#members);
  }

  /** Names that the printed functions use: state, tables and constants that none uses are left out. */
  get used(): ReadonlySet<string> {
    return new Set(this.functions.flatMap((f) => [...namesIn(f)]));
  }

  print(): string {
    return this.functions.map((f) => this.#function(f)).join('\n');
  }

  #function(f: LanguageFunction): string {
    const state = this.#stateful.has(f.name) ? ['struct state *s'] : [];
    const parameters = [...state, ...f.parameters.map((p) => `uint32_t ${p}`)];
    const valued = this.#valued.has(f.name);
    const lines = [
      ...f.comment.map((line) => `/* ${line} */`),
      `static ${valued ? 'uint32_t' : 'void'} ${f.name}(${parameters.length === 0 ? 'void' : parameters.join(', ')})`,
      '{',
      ...f.parameters.filter((p) => !namesIn(f).has(p)).map((p) => `    (void)${p};`),
      ...this.#block(f.body, '    ', valued),
    ];
    if (valued && f.body.at(-1)?.kind !== 'return') lines.push('    return 0u;');
    return `${[...lines, '}'].join('\n')}\n`;
  }

  #block(body: readonly Statement[], indent: string, valued: boolean): string[] {
    return body.flatMap((s) => this.#statement(s, indent, valued));
  }

  #statement(s: Statement, indent: string, valued: boolean): string[] {
    switch (s.kind) {
      case 'comment':
        return [`${indent}/* ${s.text} */`];
      case 'let':
        return [`${indent}uint32_t ${s.name} = ${this.#bare(s.value)};`];
      case 'assign':
        return [`${indent}${this.#name(s.name)} = ${this.#bare(s.value)};`];
      case 'store': {
        const size = this.#elementBytes(s.array);
        const value = this.#bare(s.value);
        const cast = size === 4 ? value : `(uint${size * 8}_t)(${value})`;
        return [`${indent}${this.#name(s.array)}[${this.#bare(s.index)}] = ${cast};`];
      }
      case 'return':
        return [`${indent}return${valued ? ` ${this.#bare(s.value)}` : ''};`];
      case 'call': {
        const call = this.#number(s.call);
        return [`${indent}${this.#valued.has(s.call.name) ? '(void)' : ''}${call};`];
      }
      case 'while':
        return [
          `${indent}while (${this.#condition(s.condition)}) {`,
          ...this.#block(s.body, `${indent}    `, valued),
          `${indent}}`,
        ];
      case 'if':
        return [
          `${indent}if (${this.#condition(s.condition)}) {`,
          ...this.#block(s.then, `${indent}    `, valued),
          ...(s.otherwise.length === 0
            ? []
            : [`${indent}} else {`, ...this.#block(s.otherwise, `${indent}    `, valued)]),
          `${indent}}`,
        ];
    }
  }

  #name(name: string): string {
    return this.#members.has(name) ? `s->${name}` : name;
  }

  #elementBytes(array: string): number {
    return this.#arrays.get(array)?.elementBytes ?? 4;
  }

  #condition(e: Expression): string {
    if (e.kind === 'not') return `!(${this.#condition(e.operand)})`;
    if (e.kind !== 'binary' || !isCondition(e)) throw new BugError('a number is no condition');
    if (e.op === '&&' || e.op === '||')
      return `(${this.#condition(e.left)}) ${e.op} (${this.#condition(e.right)})`;
    return `${this.#number(e.left)} ${e.op} ${this.#number(e.right)}`;
  }

  /** Where nothing binds tighter around it, an expression needs no brackets. */
  #bare(e: Expression): string {
    const text = this.#number(e);
    return e.kind === 'binary' ? text.slice(1, -1) : text;
  }

  #number(e: Expression): string {
    switch (e.kind) {
      case 'number':
        return `${e.value}u`;
      case 'name':
        if (this.#context.constants.has(e.name)) return e.name;
        return this.#name(e.name);
      case 'index': {
        const read = `${this.#name(e.array)}[${this.#bare(e.index)}]`;
        return this.#elementBytes(e.array) === 4 ? read : `(uint32_t)${read}`;
      }
      case 'call': {
        const state = this.#stateful.has(e.name) ? ['s'] : [];
        return `${e.name}(${[...state, ...e.args.map((a) => this.#bare(a))].join(', ')})`;
      }
      case 'binary':
        if (!isCondition(e)) return `(${this.#number(e.left)} ${e.op} ${this.#number(e.right)})`;
    }
    throw new BugError('a condition is no number');
  }
}

/** The members of `struct state`, one a line; buffers that are only read are pointers to const. */
export function stateMembers(context: PrintContext, used: ReadonlySet<string>): string[] {
  const { program, buffers } = context;
  const written = new Set<string>();
  for (const f of reachableFunctions(program, context.entry))
    walkFunction(f, { written: (name) => written.add(name) });
  return [
    ...buffers
      .filter((b) => used.has(b.name))
      .map(
        (b) => `    ${written.has(b.name) ? '' : 'const '}uint${b.elementBytes * 8}_t *${b.name};`,
      ),
    ...program.state.filter((name) => used.has(name)).map((name) => `    uint32_t ${name};`),
    ...[...program.stateArrays]
      .filter(([name]) => used.has(name))
      .map(([name, length]) => `    uint32_t ${name}[${length}];`),
  ];
}

const PER_LINE = 12;

/** A table as a static const array. */
export function tableText({ name, elementBytes, values, comment }: LanguageArray): string {
  if (values === undefined) throw new BugError(`${name} is a buffer`);
  const numbers = Array.from(values, (v) => `${v}u`);
  const lines: string[] = [];
  for (let i = 0; i < numbers.length; i += PER_LINE)
    lines.push(`    ${numbers.slice(i, i + PER_LINE).join(', ')},`);
  return [
    ...(comment === undefined ? [] : [`/* ${comment} */`]),
    `static const uint${elementBytes * 8}_t ${name}[${numbers.length}] = {`,
    ...lines,
    '};',
    '',
  ].join('\n');
}
