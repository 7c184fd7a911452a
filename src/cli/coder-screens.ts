import { parseCandidates } from '../coders/candidate.ts';
import type { Declaration } from '../coders/contract.ts';
import type { ParameterDeclaration } from '../coders/parameters.ts';
import { countText, padRight, wrapText } from '../report/figures.ts';
import { terminalColours } from './output.ts';

/** A label of a fixed width in bold, and text that hangs beside it. */
function hanging(label: string, labelWidth: number, texts: readonly string[], columns: number) {
  const { bold } = terminalColours();
  const lines = texts.flatMap((text) => wrapText(text, columns - labelWidth - 2));
  return lines.map((line, i) => {
    const left = padRight(i === 0 ? label : '', labelWidth);
    return ` ${i === 0 ? bold(left) : left} ${line}`.trimEnd();
  });
}

function policiesText(declaration: Declaration): string {
  return declaration.policies.includes('none')
    ? 'no tables'
    : `tables ${declaration.policies.join(', ')}`;
}

/** All coders with what they are, their table policies and where the method stands; references apart. */
export function coderListScreen(declarations: readonly Declaration[], columns: number): string {
  const labelWidth = Math.max(...declarations.map(({ name }) => name.length)) + 1;
  const entry = (declaration: Declaration) =>
    hanging(
      declaration.name,
      labelWidth,
      [declaration.summary, `${policiesText(declaration)}; ${declaration.source}`],
      columns,
    );
  return [
    ' Coders',
    ...declarations.filter(({ reference }) => !reference).flatMap(entry),
    '',
    ' References: general-purpose coders, shown for scale, never the pick',
    ...declarations.filter(({ reference }) => reference).flatMap(entry),
    '',
    ' Parameters, limits, memory and examples of one: bitassay coders NAME',
    '',
  ].join('\n');
}

function valuesText(parameter: ParameterDeclaration): string {
  if (parameter.kind === 'word') {
    return `${parameter.words.join(' | ')}; usually ${parameter.standard}`;
  }
  if (parameter.kind === 'text') return `${parameter.form}; nothing unless given`;
  const range = `${parameter.min} to ${parameter.max}`;
  if (parameter.standard !== undefined) return `${range}; usually ${parameter.standard}`;
  return parameter.optional === true ? `${range}; the coder chooses` : `${range}; must be given`;
}

/** A value beside the usual one, as an example. */
function otherValue(parameter: ParameterDeclaration): string {
  if (parameter.kind === 'word') {
    const word = parameter.words.find((w) => w !== parameter.standard) ?? parameter.standard;
    return word.replace(/:X$/, ':1/16');
  }
  if (parameter.kind === 'text') return parameter.example;
  const { min, max, standard } = parameter;
  if (isRequired(parameter)) return String(Math.min(max, min + 2));
  // The power of two at or below the middle of the range.
  const middle = 2 ** Math.floor(Math.log2(Math.max(1, (min + max) / 2)));
  return String(middle < min || middle === standard ? max : middle);
}

function isRequired(parameter: ParameterDeclaration): boolean {
  return (
    parameter.kind === 'integer' && parameter.standard === undefined && parameter.optional !== true
  );
}

/** Candidates of this coder that can be typed as they stand: the usual one, one for each parameter, and a range. */
export function candidateExamples(declaration: Declaration): string[] {
  const { name, parameters } = declaration;
  const needed = parameters.filter(isRequired);
  const write = (pairs: readonly string[]) =>
    pairs.length === 0 ? name : `${name}:${pairs.join(',')}`;
  const base = needed.map((parameter) => `${parameter.key}=${otherValue(parameter)}`);
  const texts = [write(base)];
  for (const parameter of parameters) {
    if (needed.includes(parameter)) continue;
    const value = otherValue(parameter);
    const isBare = parameter.kind === 'word' && parameter.bare === true;
    texts.push(write([...base, isBare ? value : `${parameter.key}=${value}`]));
  }
  const ranged = parameters.find(({ kind }) => kind === 'integer');
  if (ranged?.kind === 'integer') {
    const others = base.filter((pair) => !pair.startsWith(`${ranged.key}=`));
    const to = Math.min(ranged.max, ranged.min + 3);
    texts.push(write([...others, `${ranged.key}=${ranged.min}..${to}`]));
  }
  return texts.filter(isCandidate);
}

/** Some values of two parameters exclude one another. */
function isCandidate(text: string): boolean {
  try {
    for (const candidate of parseCandidates(text)) candidate.create();
    return true;
  } catch {
    return false;
  }
}

function resetsText(declaration: Declaration): string {
  const adaptive = declaration.policies.some((policy) => policy !== 'none' && policy !== 'shipped');
  return adaptive
    ? declaration.resets.join(', ')
    : 'none needed: nothing is kept from message to message';
}

/**
 * All that one coder says of itself.
 * @param examples  from {@link candidateExamples}
 */
export function coderScreen(
  declaration: Declaration,
  examples: readonly string[],
  columns: number,
): string {
  const { parameters } = declaration;
  const rows: [string, readonly string[]][] = [
    ['tables', [policiesText(declaration).replace(/^(no )?tables ?/, '') || 'none needed']],
    ['resets', [resetsText(declaration)]],
    ['alphabet', [`up to ${countText(declaration.maxAlphabetSize)} symbols`]],
    ['worst case', [declaration.worstCase]],
    ['memory', [declaration.memory]],
    [
      'delay',
      [
        declaration.needsWholeMessage
          ? 'the encoder holds a whole message before its first bit'
          : 'the encoder writes while it reads',
      ],
    ],
    ['source', [declaration.source]],
    ['examples', examples],
  ];
  const keyWidth = Math.max(11, ...parameters.map(({ key }) => key.length + 1));
  const title = `${declaration.name}:`;
  const lines = hanging(title, title.length, [declaration.summary], columns);
  if (declaration.reference) {
    lines.push(' A reference: shown for scale, never the pick; its bits are never gated.');
  }
  lines.push('', parameters.length === 0 ? ' No parameters' : ' Parameters');
  for (const parameter of parameters) {
    lines.push(
      ...hanging(parameter.key, keyWidth, [valuesText(parameter), parameter.summary], columns),
    );
  }
  lines.push('');
  for (const [label, texts] of rows) lines.push(...hanging(label, keyWidth, texts, columns));
  lines.push('', ` Measure it: bitassay try FILE --coder ${examples[0]}`, '');
  return lines.join('\n');
}
