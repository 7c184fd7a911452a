import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { baselineOf } from '../../src/gate/baseline.ts';
import { type Gate, gateRun } from '../../src/gate/gate.ts';
import { gateJunit } from '../../src/report/gate-junit.ts';
import { gateMarkdown, markdownCode, markdownText } from '../../src/report/gate-markdown.ts';
import { gateScreen } from '../../src/report/gate-screen.ts';
import { cellOf, recordOf } from './made-up.ts';

interface Element {
  readonly name: string;
  readonly attributes: Readonly<Record<string, string>>;
  readonly children: Element[];
  text: string;
}

const ENTITIES: Readonly<Record<string, string>> = {
  lt: '<',
  gt: '>',
  amp: '&',
  quot: '"',
  apos: "'",
};

function decoded(text: string): string {
  expect(text).not.toMatch(/[<]/);
  return text.replace(/&([^;]*);?/g, (all, name: string) => {
    if (/^#\d+$/.test(name) && all.endsWith(';'))
      return String.fromCodePoint(Number(name.slice(1)));
    const found = ENTITIES[name];
    if (found === undefined || !all.endsWith(';')) throw new Error(`no entity: ${all}`);
    return found;
  });
}

/**
 * A strict walk over XML 1.0 without doctype, comments or CDATA: its productions of Char, STag, ETag, AttValue (Bray, Paoli,
 * Sperberg-McQueen, Maler, Yergeau 2008, sections 2.2, 3.1). Throws for what is not well-formed.
 */
function parseXml(xml: string): Element {
  if (/[^\t\n\r\u0020-\ud7ff\ue000-\ufffd\u{10000}-\u{10ffff}]/u.test(xml))
    throw new Error('a character that XML has not');
  const body = xml.replace(/^<\?xml version="1\.0" encoding="UTF-8"\?>\n/, '');
  if (body === xml) throw new Error('no declaration');
  const root: Element = { name: '', attributes: {}, children: [], text: '' };
  const open = [root];
  const token = /<(\/?)([A-Za-z][\w.-]*)((?:\s+[A-Za-z][\w.-]*="[^"<]*")*)\s*(\/?)>|([^<]+)/y;
  for (let at = 0; at < body.length; at = token.lastIndex) {
    token.lastIndex = at;
    const found = token.exec(body);
    if (found === null) throw new Error(`not well-formed at ${body.slice(at, at + 40)}`);
    const [, end, name, attributes, empty, text] = found;
    const inside = open.at(-1)!;
    if (text !== undefined) {
      inside.text += decoded(text);
    } else if (end === '/') {
      if (inside.name !== name) throw new Error(`${name} ends ${inside.name}`);
      open.pop();
    } else {
      const pairs = [...attributes.matchAll(/([\w.-]+)="([^"]*)"/g)].map(
        ([, key, value]) => [key, decoded(value)] as const,
      );
      if (new Set(pairs.map(([key]) => key)).size !== pairs.length) throw new Error('twice');
      const element = { name, attributes: Object.fromEntries(pairs), children: [], text: '' };
      inside.children.push(element);
      if (empty === '') open.push(element);
    }
  }
  if (open.length !== 1 || root.children.length !== 1) throw new Error('not one tree');
  return root.children[0];
}

const HOSTILE = `a/x:y=<"&'>]]>|\`b\` @team #12 \u0000\u001b[31m\n\ud800@sent/message`;

function lostGate(id = 'a/huffman@sent/message', title = 'made up'): Gate {
  const account = { floor: 400, opening: 0, model: 7100, tables: 420, ends: 80 };
  const files = (bytes: number) =>
    Array.from({ length: 8 }, (_, i) => ({
      sha256: String(i).repeat(64),
      symbol_count: 125,
      coded_bytes: bytes + i,
    }));
  const named = (bytes: number, more: Parameters<typeof cellOf>[2]) => ({
    ...cellOf('a/huffman@sent/message', bytes, more),
    id,
  });
  const steady = cellOf('a/arith@learned/message', 990);
  const failing = cellOf('a/fixed@none/message', 1000);
  const better = cellOf('a/rice@none/message', 1000);
  const before = recordOf([
    named(1000, { account, files: files(100) }),
    steady,
    failing,
    better,
    cellOf('a/gone@none/message', 1),
  ]);
  const after = recordOf([
    named(1051, { account: { ...account, tables: 832, ends: 76 }, files: files(106) }),
    steady,
    { ...failing, verified: false, failure: HOSTILE },
    { ...better, carried_bits: 7000 },
  ]);
  return gateRun(baselineOf(before), { ...after, plan: { ...after.plan, title } });
}

describe('JUnit XML', () => {
  it('has a test for each figure, with counts that are right', () => {
    const root = parseXml(gateJunit(lostGate()));
    expect(root.name).toBe('testsuites');
    const [suite] = root.children;
    const cases = suite.children;
    const having = (name: string) =>
      cases.filter((one) => one.children.some((child) => child.name === name));
    for (const { attributes } of [root, suite]) {
      expect(Number(attributes['tests'])).toBe(cases.length);
      expect(Number(attributes['failures'])).toBe(having('failure').length);
      expect(Number(attributes['skipped'])).toBe(having('skipped').length);
    }
    // Bits, files and a decode are lost.
    expect(having('failure').map((one) => one.attributes['name'])).toEqual([
      'a/fixed@none/message: decode gives back the input',
      'a/huffman@sent/message: carried bits',
      'a/huffman@sent/message: files',
    ]);
    const [failure] = having('failure')[1].children;
    expect(failure.attributes['message']).toContain(
      'tables +412 bits: a table takes 83.2 bits, was 42.0',
    );
    expect(failure.text).toBe(failure.attributes['message']);
    expect(having('skipped').map((one) => one.attributes['name'])).toContain('a/gone@none/message');
  });

  it('is well-formed whatever names say', () => {
    const gate = lostGate(HOSTILE, HOSTILE);
    const [suite] = parseXml(gateJunit(gate)).children;
    const shown = HOSTILE.replace('\u0000', '\ufffd')
      .replace('\u001b', '\ufffd')
      .replace('\ud800', '\ufffd');
    expect(suite.attributes['name']).toBe(`bitassay gate: ${shown}`);
    fc.assert(
      fc.property(fc.string({ unit: 'binary', maxLength: 40 }), fc.string(), (id, title) => {
        parseXml(gateJunit(lostGate(id, title)));
      }),
      { numRuns: 50 },
    );
  });
});

/** Cells of a row of a table as GitHub-flavoured Markdown cuts them: at bars that no backslash stands before (GFM 0.29, 4.10). */
const rowCells = (row: string): string[] => row.split(/(?<!\\)\|/).slice(1, -1);

describe('Markdown', () => {
  it('has rows of as many cells as titles, whatever names say', () => {
    for (const id of [HOSTILE, 'a|b', '|||', '``|`', 'x\\|y', '']) {
      const rows = gateMarkdown(lostGate(id, id))
        .split('\n')
        .filter((line) => line.startsWith('|'));
      expect(rows.length).toBeGreaterThan(3);
      for (const row of rows) expect(rowCells(row), row).toHaveLength(4);
    }
  });

  it('names lines, files and what is not paired', () => {
    const text = gateMarkdown(lostGate());
    expect(text).toContain('### bitassay gate: lost: 2 of 4 cells do not hold');
    expect(text).toContain('- tables +412 bits: a table takes 83.2 bits, was 42.0');
    expect(text).toContain('- `a/gone@none/message`: not in this run');
    expect(text.match(/\+\d\.\d\d %/g)?.length).toBeGreaterThanOrEqual(5);
  });

  it('lets no text out of code, and none act outside of it', () => {
    expect(markdownCode('a`b')).toBe('``a`b``');
    expect(markdownCode('`')).toBe('`` ` ``');
    expect(markdownCode('a|b')).toBe('`a\\|b`');
    expect(markdownText('<b> *x* [y](z) a|b `c`')).toBe(
      '&lt;b&gt; \\*x\\* \\[y\\](z) a\\|b \\`c\\`',
    );
    expect(markdownText('@team #12')).toBe('@<!-- -->team #<!-- -->12');
    fc.assert(
      fc.property(fc.string(), (text) => {
        const code = markdownCode(text);
        const fence = /^`+/.exec(code)![0];
        const inside = code.slice(fence.length, -fence.length);
        // CommonMark 0.31, 6.1: a run of as many backticks would end the code.
        const runs = [...inside.matchAll(/`+/g)].map(([run]) => run.length);
        expect(runs).not.toContain(fence.length);
        expect(code).not.toContain('\n');
      }),
    );
  });
});

describe('the screen', () => {
  const options = { run: 'plan.run', baseline: 'bitassay.baseline.json' };

  it.each([80, 100])('fits %i columns and names what grew and which files', (columns) => {
    const screen = gateScreen(lostGate(), { ...options, columns });
    for (const line of screen.split('\n')) expect([...line].length).toBeLessThan(columns);
    expect(screen).toContain(' lost: 2 of 4 cells do not hold');
    expect(screen).toContain('tables +412 bits: a table takes 83.2 bits, was 42.0');
    expect(screen).toContain('carried bits: 8 408, was 8 000 (+408, +5.10 %)');
    expect(screen.replace(/\s+/g, ' ')).toContain(
      '000000000000 +6.00 % (+48 bits), 111111111111 +5.94 % (+48 bits)',
    );
    expect(screen.replace(/\s+/g, ' ')).toContain('and 3 more; 8 beyond');
    expect(screen).toContain(
      'a/rice@none/message: carried bits 7 000, was 8 000 (−1 000, −12.5 %)',
    );
    expect(screen).toContain('a/gone@none/message: not in this run');
  });

  it('spells growth in the letters of the account', () => {
    // 412 bits of tables and −4 of ends: at most 10 bits a letter fit all into the width.
    const screen = gateScreen(lostGate(), { ...options, columns: 100 });
    const [, piece] = /one letter = (\d+) bits more: .*t tables/.exec(screen)!;
    const letters = /\+5\.10 % +(?:\(e*\) )?(t+)$/m.exec(screen)![1];
    expect(letters).toHaveLength(Math.round(412 / Number(piece)));
  });

  it('lets no control character through', () => {
    const screen = gateScreen(lostGate(HOSTILE, HOSTILE), { ...options, columns: 80 });
    expect(screen.replaceAll('\n', '')).not.toMatch(/\p{Cc}/u);
  });

  it('asks for a gain to be adopted', () => {
    const before = recordOf([cellOf('a/rice@none/message', 1000)]);
    const after = recordOf([cellOf('a/rice@none/message', 999)]);
    const screen = gateScreen(gateRun(baselineOf(before), after), { ...options, columns: 100 });
    expect(screen).toContain('better: 1 of 1 cell, and nothing is lost: adopt it?');
    expect(screen).toContain('Next: bitassay adopt plan.run -o bitassay.baseline.json');
  });
});
