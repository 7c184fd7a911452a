import { BugError } from '../errors/errors.ts';
import {
  type BinaryOperator,
  type Expression,
  type LanguageFunction,
  type LanguageProgram,
  PRECEDENCE,
  type Statement,
} from './language.ts';

interface Token {
  readonly text: string;
  readonly kind: 'name' | 'number' | 'mark' | 'comment' | 'end';
  readonly line: number;
}

const TOKEN =
  /\s*(?:\/\/[ ]?(?<comment>[^\n]*)|(?<name>[A-Za-z_][A-Za-z_0-9]*)|(?<number>0x[0-9a-fA-F]+|[0-9]+)|(?<mark><<|>>|<=|>=|==|!=|&&|\|\||[-+*/%&|^<>=!(){}[\],;]))/y;

function tokensOf(text: string): Token[] {
  const tokens: Token[] = [];
  TOKEN.lastIndex = 0;
  let at = 0;
  const lineAt = (index: number) => text.slice(0, index).split('\n').length;
  while (text.slice(at).trim() !== '') {
    TOKEN.lastIndex = at;
    const match = TOKEN.exec(text);
    if (match === null) throw new BugError(`export program, line ${lineAt(at)}: unreadable`);
    at = TOKEN.lastIndex;
    const kinds = match.groups as Record<string, string | undefined>;
    const kind = (['comment', 'name', 'number', 'mark'] as const).find(
      (k) => kinds[k] !== undefined,
    )!;
    tokens.push({ kind, text: kinds[kind]!, line: lineAt(at) });
  }
  tokens.push({ kind: 'end', text: 'the end', line: lineAt(at) });
  return tokens;
}

/** Reads one token after another. */
class Parser {
  readonly #tokens: readonly Token[];
  #at = 0;

  constructor(text: string) {
    this.#tokens = tokensOf(text);
  }

  get next(): Token {
    return this.#tokens[this.#at];
  }

  take(): Token {
    return this.#tokens[this.#at++];
  }

  takes(text: string): boolean {
    if (this.next.text !== text || this.next.kind === 'comment') return false;
    this.#at++;
    return true;
  }

  want(text: string): void {
    if (!this.takes(text)) this.fail(text);
  }

  name(): string {
    if (this.next.kind !== 'name') this.fail('a name');
    return this.take().text;
  }

  number(): number {
    if (this.next.kind !== 'number') this.fail('a number');
    return Number(this.take().text);
  }

  fail(expected: string): never {
    const { line, text } = this.next;
    throw new BugError(`export program, line ${line}: expected ${expected}, got ${text}`);
  }

  expression(level = 0): Expression {
    if (level === PRECEDENCE.length) return this.operand();
    let left = this.expression(level + 1);
    for (;;) {
      const op = PRECEDENCE[level].find((o) => this.takes(o)) as BinaryOperator | undefined;
      if (op === undefined) return left;
      left = { kind: 'binary', op, left, right: this.expression(level + 1) };
    }
  }

  operand(): Expression {
    if (this.takes('!')) return { kind: 'not', operand: this.operand() };
    if (this.takes('(')) {
      const inner = this.expression();
      this.want(')');
      return inner;
    }
    if (this.next.kind === 'number') return { kind: 'number', value: this.number() };
    const name = this.name();
    if (this.takes('(')) return { kind: 'call', name, args: this.list(')') };
    if (this.takes('[')) {
      const index = this.expression();
      this.want(']');
      return { kind: 'index', array: name, index };
    }
    return { kind: 'name', name };
  }

  list(end: string): Expression[] {
    const items: Expression[] = [];
    while (!this.takes(end)) {
      items.push(this.expression());
      if (this.next.text !== end) this.want(',');
    }
    return items;
  }

  block(): Statement[] {
    this.want('{');
    const statements: Statement[] = [];
    while (!this.takes('}')) statements.push(this.statement());
    return statements;
  }

  condition(): Expression {
    this.want('(');
    const condition = this.expression();
    this.want(')');
    return condition;
  }

  statement(): Statement {
    if (this.next.kind === 'comment') return { kind: 'comment', text: this.take().text };
    if (this.takes('if')) {
      const condition = this.condition();
      const then = this.block();
      if (!this.takes('else')) return { kind: 'if', condition, then, otherwise: [] };
      const otherwise = this.next.text === 'if' ? [this.statement()] : this.block();
      return { kind: 'if', condition, then, otherwise };
    }
    if (this.takes('while')) {
      const condition = this.condition();
      return { kind: 'while', condition, body: this.block() };
    }
    const statement = this.simple();
    this.want(';');
    return statement;
  }

  simple(): Statement {
    if (this.takes('return')) return { kind: 'return', value: this.expression() };
    if (this.takes('let')) {
      const name = this.name();
      this.want('=');
      return { kind: 'let', name, value: this.expression() };
    }
    const target = this.operand();
    if (target.kind === 'call') return { kind: 'call', call: target };
    this.want('=');
    const value = this.expression();
    if (target.kind === 'name') return { kind: 'assign', name: target.name, value };
    if (target.kind === 'index')
      return { kind: 'store', array: target.array, index: target.index, value };
    return this.fail('a variable or an element');
  }

  parameters(): string[] {
    this.want('(');
    const names: string[] = [];
    while (!this.takes(')')) {
      names.push(this.name());
      if (this.next.text !== ')') this.want(',');
    }
    return names;
  }
}

/**
 * Reads programs in the export language; later ones may use what earlier ones define.
 * @throws BugError with the line of what cannot be read: the texts are ours
 */
export function parseProgram(...texts: readonly string[]): LanguageProgram {
  const state: string[] = [];
  const stateArrays = new Map<string, number>();
  const functions = new Map<string, LanguageFunction>();
  for (const text of texts) {
    const parser = new Parser(text);
    let comment: string[] = [];
    while (parser.next.kind !== 'end') {
      if (parser.next.kind === 'comment') {
        comment.push(parser.take().text);
        continue;
      }
      if (parser.takes('state')) {
        do {
          const name = parser.name();
          if (parser.takes('[')) {
            stateArrays.set(name, parser.number());
            parser.want(']');
          } else state.push(name);
        } while (parser.takes(','));
        parser.want(';');
      } else {
        parser.want('fn');
        const name = parser.name();
        if (functions.has(name)) throw new BugError(`export program: ${name} is defined twice`);
        functions.set(name, {
          name,
          comment,
          parameters: parser.parameters(),
          body: parser.block(),
        });
      }
      comment = [];
    }
  }
  const program = { state, stateArrays, functions };
  refuseShadows(program);
  return program;
}

/** A local name that is also one of the state would mean different things in different languages. */
function refuseShadows({ state, stateArrays, functions }: LanguageProgram): void {
  const taken = new Set([...state, ...stateArrays.keys()]);
  const letsIn = (body: readonly Statement[]): string[] =>
    body.flatMap((s) => {
      if (s.kind === 'let') return [s.name];
      if (s.kind === 'while') return letsIn(s.body);
      return s.kind === 'if' ? [...letsIn(s.then), ...letsIn(s.otherwise)] : [];
    });
  for (const { name, parameters, body } of functions.values()) {
    const shadow = [...parameters, ...letsIn(body)].find((local) => taken.has(local));
    if (shadow !== undefined)
      throw new BugError(`export program: ${name} has a local ${shadow}, which is state`);
  }
}
