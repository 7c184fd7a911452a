/**
 * The one place that knows the layers of src/. A folder imports only from rows above its own; folders of one
 * row are siblings and do not import one another. The library's faces, src/index.ts and src/vitest.ts, may import
 * from all; nothing in src/ imports them. Type imports count: they bind two folders as firmly as any other.
 *
 * The check reads syntax, not text, so that neither a comment nor a line break hides an import. It sees static
 * and dynamic imports, re-exports, type-position imports, `require`, and files named by
 * `new URL('./x.js', import.meta.url)` (the entry of a worker).
 */
import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { dirname, join, relative, resolve, sep } from 'node:path';
import { fileURLToPath } from 'node:url';
import { parseSync } from 'vite';
import { isStarted } from './ensure.mjs';

/** Lowest first. */
export const rows = [
  ['errors'],
  ['statistics'],
  ['bits'],
  ['symbols'],
  ['corpus'],
  ['transforms'],
  ['models'],
  ['stages'],
  ['coders'],
  ['entropy'],
  ['account'],
  ['harness'],
  ['compare'],
  ['gate', 'export'],
  ['report'],
  ['cli'],
];

const faces = ['index.ts', 'vitest.ts'];

/** @typedef {{ file: string, line: number, specifier: string, problem: string }} Fault */
/** @typedef {{ type: string, start: number, [key: string]: unknown }} Node */

/** @param {unknown} value @returns {value is Node} */
const isNode = (value) => typeof value === 'object' && value !== null && 'type' in value;

/** @param {unknown} node */
function text(node) {
  if (!isNode(node)) return undefined;
  if (node.type === 'TemplateLiteral') {
    const quasis = /** @type {{ value: { cooked: string } }[]} */ (node['quasis']);
    return quasis.length === 1 ? quasis[0].value.cooked : undefined;
  }
  return typeof node['value'] === 'string' ? node['value'] : undefined;
}

/** The specifier that a syntax node names, if it is one that binds two files. @param {Node} node */
function namedBy(node) {
  const args = /** @type {unknown[]} */ (node['arguments'] ?? []);
  const callee = /** @type {{ name?: string } | undefined} */ (node['callee'])?.name;
  switch (node.type) {
    case 'ImportDeclaration':
    case 'ExportNamedDeclaration':
    case 'ExportAllDeclaration':
    case 'ImportExpression':
    case 'TSImportType':
      return text(node['source']);
    case 'TSExternalModuleReference':
      return text(node['expression']);
    case 'CallExpression':
      return callee === 'require' ? text(args[0]) : undefined;
    case 'NewExpression':
      return callee === 'URL' && isNode(args[1]) ? text(args[0]) : undefined;
    default:
      return undefined;
  }
}

/**
 * All specifiers of one source text, in the order of the text.
 * @param {string} file
 * @param {string} source
 */
function specifiersOf(file, source) {
  const { program, errors } = parseSync(file, source);
  if (errors.length > 0) throw new Error(`${file} does not parse: ${errors[0].message}`);
  /** @type {{ specifier: string, start: number }[]} */
  const found = [];
  /** @type {unknown[]} */
  const open = [program];
  while (open.length > 0) {
    const next = open.pop();
    if (Array.isArray(next)) open.push(...next);
    else if (isNode(next)) {
      const specifier = namedBy(next);
      if (specifier !== undefined) found.push({ specifier, start: next.start });
      open.push(...Object.values(next));
    }
  }
  return found.sort((a, b) => a.start - b.start);
}

/** The folder under src/ in which a file lies; '' for a file in src/ itself. @param {string} inside */
const layerOf = (inside) => (inside.includes(sep) ? inside.slice(0, inside.indexOf(sep)) : '');

/** @param {string} layer */
const rowOf = (layer) => rows.findIndex((row) => row.includes(layer));

/**
 * Why the file may not name the target, or undefined where it may. Both paths are relative to src/.
 * @param {string} from
 * @param {string} target
 */
function verdict(from, target) {
  if (target === `..${sep}package.json`) return undefined;
  if (target.startsWith('..')) return 'leaves src/';
  if (/^(index|vitest)\.[jt]s$/.test(target))
    return `nothing in src/ may import ${target}, a face of the library`;
  if (faces.includes(from)) return undefined;
  const [own, other] = [layerOf(from), layerOf(target)];
  if (own === other) return undefined;
  if (rowOf(other) < 0) return `'${other || target}' is no layer`;
  if (rowOf(other) < rowOf(own)) return undefined;
  return rowOf(other) === rowOf(own)
    ? `${own} and ${other} share a row and do not import one another`
    : `${own} lies below ${other}`;
}

/**
 * Reads every source file under the folder and lists the imports that break the order.
 * @param {string} src
 * @returns {{ files: number, imports: number, faults: Fault[] }}
 */
export function checkLayers(src) {
  const files = readdirSync(src, { recursive: true, encoding: 'utf8' })
    .filter((path) => /\.[cm]?[jt]sx?$/.test(path))
    .sort();
  /** @type {Fault[]} */
  const faults = [];
  let imports = 0;
  for (const from of files) {
    const file = join(src, from);
    const source = readFileSync(file, 'utf8');
    if (!faces.includes(from) && rowOf(layerOf(from)) < 0) {
      faults.push({ file, line: 1, specifier: '', problem: 'lies in no layer' });
      continue;
    }
    for (const { specifier, start } of specifiersOf(file, source)) {
      const own = specifier === 'bitassay' || specifier.startsWith('bitassay/');
      if (!own && !specifier.startsWith('.')) continue;
      imports++;
      const target = own ? faces[0] : relative(src, resolve(dirname(file), specifier));
      const problem = verdict(from, target);
      if (problem === undefined) continue;
      faults.push({ file, line: source.slice(0, start).split('\n').length, specifier, problem });
    }
  }
  return { files: files.length, imports, faults };
}

if (isStarted(import.meta.url)) {
  const root = dirname(dirname(fileURLToPath(import.meta.url)));
  const src = join(root, 'src');
  const { files, imports, faults } = existsSync(src)
    ? checkLayers(src)
    : { files: 0, imports: 0, faults: [] };
  for (const { file, line, specifier, problem } of faults) {
    console.error(
      `${relative(root, file)}:${line} ${specifier && `imports ${specifier}: `}${problem}`,
    );
  }
  console.error(`Layers: ${imports} imports in ${files} files, ${faults.length} against the order`);
  // A check that has seen nothing has not passed.
  process.exitCode = faults.length > 0 || imports === 0 ? 1 : 0;
}
