import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterEach, describe, expect, it } from 'vitest';
import { checkLayers, rows } from '../scripts/layers.mjs';

const src = fileURLToPath(new URL('../src', import.meta.url));

const folders: string[] = [];
afterEach(() => {
  for (const folder of folders.splice(0)) rmSync(folder, { recursive: true, force: true });
});

/** Writes a small source tree and returns what the checker says of it. */
function check(tree: Record<string, string>) {
  const folder = mkdtempSync(join(tmpdir(), 'bitassay-layers-'));
  folders.push(folder);
  for (const [name, source] of Object.entries(tree)) {
    mkdirSync(dirname(join(folder, name)), { recursive: true });
    writeFileSync(join(folder, name), source);
  }
  const { faults, ...counts } = checkLayers(folder);
  return {
    ...counts,
    faults: faults.map(
      ({ file, line, problem }) => `${file.slice(folder.length + 1)}:${line} ${problem}`,
    ),
  };
}

describe('the sources', () => {
  it('keep the order of the layers', () => {
    const { files, imports, faults } = checkLayers(src);
    expect(files).toBeGreaterThan(10);
    expect(imports).toBeGreaterThan(10);
    expect(faults).toEqual([]);
  });
});

describe('the checker', () => {
  it('lets every row import from all rows above it, and the face from every row', () => {
    const tree: Record<string, string> = { 'index.ts': '' };
    const above: string[] = [];
    for (const row of rows) {
      for (const layer of row) {
        tree[`${layer}/a.ts`] = [...above, `${layer}/b`]
          .map((path) => `import '../${path}.ts';\n`)
          .join('');
        tree[`${layer}/b.ts`] = '';
      }
      above.push(...row.map((layer) => `${layer}/b`));
    }
    tree['index.ts'] = above.map((path) => `export * from './${path}.ts';\n`).join('');
    const { files, imports, faults } = check(tree);
    const layers = rows.flat().length;
    expect(files).toBe(2 * layers + 1);
    expect(imports).toBeGreaterThan(layers * 3);
    expect(faults).toEqual([]);
  });

  it.each([
    ['an import', `import { run } from '../harness/run.ts';`],
    ['an import over several lines', `import {\n  run,\n} from '../harness/run.ts';`],
    ['an import for its effect', `import '../harness/run.ts';`],
    ['a type import', `import type { Run } from '../harness/run.ts';`],
    ['a type inside a type', `export type Copy = import('../harness/run.ts').Run;`],
    ['a re-export', `export { run } from '../harness/run.ts';`],
    ['a re-export of types', `export type { Run } from '../harness/run.ts';`],
    ['a re-export of everything', `export * from '../harness/run.ts';`],
    ['a re-export under a name', `export * as harness from '../harness/run.ts';`],
    ['a dynamic import', `export const load = () => import('../harness/run.ts');`],
    ['a dynamic import in backquotes', 'export const load = () => import(`../harness/run.ts`);'],
    ['a require', `const { run } = require('../harness/run.ts');`],
    ['a worker entry', `new Worker(new URL('../harness/run.js', import.meta.url));`],
  ])('reports %s from a lower layer, with file and line', (_, source) => {
    const { files, faults } = check({
      'bits/writer.ts': `// import '../cli/main.ts' in a comment is none\nconst text = "import '../cli/main.ts'";\n${source}\n`,
      'harness/run.ts': 'export const run = 1;\nexport type Run = 1;\n',
    });
    expect(files).toBe(2);
    expect(faults).toEqual(['bits/writer.ts:3 bits lies below harness']);
  });

  it('reports siblings that import one another', () => {
    const { faults } = check({
      'gate/gate.ts': `import '../compare/compare.ts';\nimport '../export/export.ts';\n`,
      'export/export.ts': `import '../gate/gate.ts';\n`,
    });
    expect(faults).toEqual([
      'export/export.ts:1 export and gate share a row and do not import one another',
      'gate/gate.ts:2 gate and export share a row and do not import one another',
    ]);
  });

  it('reports an import of the face, by path and by name', () => {
    const { faults } = check({
      'index.ts': `export * from './bits/writer.ts';\n`,
      'bits/writer.ts': `import '../index.ts';\n`,
      'cli/main.ts': `\nimport 'bitassay';\n`,
    });
    expect(faults).toEqual([
      'bits/writer.ts:1 nothing in src/ may import index.ts, a face of the library',
      'cli/main.ts:2 nothing in src/ may import index.ts, a face of the library',
    ]);
  });

  it('reports a file outside all layers, an import of one, and an import that leaves src/', () => {
    const { faults } = check({
      'helpers/text.ts': '',
      'loose.ts': '',
      'cli/main.ts': [
        `import '../helpers/text.ts';`,
        `import '../loose.ts';`,
        `import '../../test/data.ts';`,
        `import '../../package.json' with { type: 'json' };`,
      ].join('\n'),
    });
    expect(faults).toEqual([
      "cli/main.ts:1 'helpers' is no layer",
      "cli/main.ts:2 'loose.ts' is no layer",
      'cli/main.ts:3 leaves src/',
      'helpers/text.ts:1 lies in no layer',
      'loose.ts:1 lies in no layer',
    ]);
  });

  it('refuses a file that it cannot read as a program', () => {
    expect(() => check({ 'bits/writer.ts': 'import {' })).toThrow(/writer\.ts does not parse/);
  });
});
