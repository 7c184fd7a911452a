import type { CellGate, Gate } from '../gate/gate.ts';
import type { GateCheck } from '../gate/gate-check.ts';
import { figureWords, fileText, lineText, valuesText, WORST_FILES } from './gate-words.ts';

/** Text as XML 1.0 takes it, in an attribute or between tags: what it cannot hold is replaced. */
function xmlText(text: string): string {
  return text
    .replaceAll('\u00a0', ' ')
    .replace(/[^\t\n\r\u0020-\ud7ff\ue000-\ufffd\u{10000}-\u{10ffff}]/gu, '\ufffd')
    .replace(
      /[&<>"'\t\n\r]/g,
      (c) =>
        ({ '&': '&amp;', '<': '&lt;', '>': '&gt;', '"': '&quot;', "'": '&apos;' })[c] ??
        `&#${c.charCodeAt(0)};`,
    );
}

/** What a failure says: the check, and of bits the account's lines and the files. */
function failureText(cell: CellGate, check: GateCheck): string {
  const texts = [`${figureWords(check.figure)}: ${valuesText(check)}`];
  if (check.figure === 'carried_bits' || check.figure === 'files') {
    const grown = cell.lines.filter(({ was, now }) => now > was);
    texts.push(...grown.map(lineText));
    texts.push(
      ...cell.files
        .filter(({ was, now }) => now > was)
        .slice(0, WORST_FILES)
        .map(fileText),
    );
  }
  return texts.join('; ');
}

function testCase(cell: CellGate, check: GateCheck): string {
  const open = `  <testcase classname="${xmlText(cell.corpus)}" name="${xmlText(`${cell.id}: ${figureWords(check.figure)}`)}"`;
  if (check.verdict === 'lost') {
    const text = xmlText(failureText(cell, check));
    return `${open}><failure message="${text}" type="lost">${text}</failure></testcase>`;
  }
  if (check.verdict === 'not compared')
    return `${open}><skipped message="${xmlText(check.reason ?? '')}"/></testcase>`;
  return `${open}/>`;
}

/** The gate as JUnit XML: a test for each figure of each cell; what was not paired or compared is skipped. */
export function gateJunit(gate: Gate): string {
  const cases = gate.cells.flatMap((cell) => cell.checks.map((check) => testCase(cell, check)));
  const unpaired = gate.unpaired.map(
    ({ id, reason }) =>
      `  <testcase classname="not paired" name="${xmlText(id)}"><skipped message="${xmlText(reason)}"/></testcase>`,
  );
  const checks = gate.cells.flatMap((cell) => cell.checks);
  const of = (verdict: GateCheck['verdict']) => checks.filter((c) => c.verdict === verdict).length;
  const counts = `tests="${cases.length + unpaired.length}" failures="${of('lost')}" errors="0" skipped="${of('not compared') + unpaired.length}"`;
  return [
    '<?xml version="1.0" encoding="UTF-8"?>',
    `<testsuites ${counts}>`,
    ` <testsuite name="${xmlText(`bitassay gate: ${gate.title}`)}" ${counts}>`,
    ...cases,
    ...unpaired,
    ' </testsuite>',
    '</testsuites>',
    '',
  ].join('\n');
}
