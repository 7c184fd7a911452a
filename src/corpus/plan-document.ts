import {
  type Document,
  isAlias,
  isMap,
  isScalar,
  isSeq,
  LineCounter,
  type Node,
  type Pair,
  parseDocument,
} from 'yaml';
import type { Fault } from './plan-faults.ts';

/** A YAML text with the line of everything in it. */
export interface PlanDocument {
  /** What the text says, as plain data; undefined when it could not be read. */
  readonly data: unknown;
  /** Everything that is wrong with it as YAML. */
  readonly faults: readonly Fault[];
  /** Line, from 1, of the key or list item at `path`, or of the nearest thing around it that there is. */
  lineOf(path: readonly PropertyKey[]): number;
  /** Whether the text has something at `path`. */
  has(path: readonly PropertyKey[]): boolean;
}

/** Reads YAML 1.2, core schema; keys must not repeat. */
export function readPlanDocument(text: string): PlanDocument {
  const lines = new LineCounter();
  const document = parseDocument(text, {
    lineCounter: lines,
    prettyErrors: false,
    logLevel: 'error',
  });
  const faults = document.errors.map((error): Fault => {
    const line = lines.linePos(error.pos[0]).line;
    if (error.code !== 'DUPLICATE_KEY') return { line, problem: `not YAML: ${error.message}` };
    const key = /^[^\s:#]+/.exec(text.slice(error.pos[0]))?.[0] ?? '';
    return { line, key, problem: 'the key stands twice', advice: 'Keep one of them.' };
  });
  let data: unknown;
  if (faults.length === 0) {
    try {
      data = document.toJS();
    } catch (error) {
      // Aliases without an anchor, or so many that they stand for a bomb.
      faults.push({ line: 1, problem: `not YAML: ${(error as Error).message}` });
    }
  }
  const walk = (path: readonly PropertyKey[]) => walkTo(document, path);
  return {
    data,
    faults,
    lineOf: (path) => lines.linePos(walk(path).offset).line || 1,
    has: (path) => walk(path).found,
  };
}

/** Follows `path` as far as the document goes. */
function walkTo(
  document: Document.Parsed,
  path: readonly PropertyKey[],
): { offset: number; found: boolean } {
  let node: Node | null | undefined = document.contents;
  let offset = node?.range?.[0] ?? 0;
  for (const key of path) {
    if (isAlias(node)) node = node.resolve(document);
    if (isMap(node)) {
      const pair: Pair<unknown, unknown> | undefined = node.items.find(
        (item) => (isScalar(item.key) ? String(item.key.value) : String(item.key)) === String(key),
      );
      if (pair === undefined) return { offset, found: false };
      offset = (pair.key as Node).range?.[0] ?? offset;
      node = pair.value as Node | null;
    } else if (isSeq(node)) {
      node = node.items[Number(key)] as Node | undefined;
      if (node === undefined) return { offset, found: false };
      offset = node.range?.[0] ?? offset;
    } else return { offset, found: false };
  }
  return { offset, found: true };
}
