import type { Declaration } from '../coders/contract.ts';
import type { ParameterDeclaration } from '../coders/parameters.ts';
import { transformFamilies } from '../transforms/registry.ts';

function parameterRow(parameter: ParameterDeclaration): string {
  const values =
    parameter.kind === 'integer'
      ? `${parameter.min} … ${parameter.max}`
      : parameter.kind === 'text'
        ? parameter.form
        : parameter.words.map((word) => `\`${word}\``).join(', ');
  const standard =
    parameter.standard !== undefined
      ? `\`${parameter.standard}\``
      : parameter.kind === 'integer' && parameter.optional
        ? 'chosen by the coder'
        : parameter.kind === 'text'
          ? 'not given'
          : 'must be given';
  return `| \`${parameter.key}\` | ${values} | ${standard} | ${parameter.summary} |`;
}

function section(declaration: Declaration): string[] {
  const list = (words: readonly string[]): string => words.map((word) => `\`${word}\``).join(', ');
  return [
    `## ${declaration.name}${declaration.reference ? ' (reference)' : ''}`,
    '',
    declaration.summary,
    '',
    `- tables: ${list(declaration.policies)}`,
    `- resets: ${list(declaration.resets)}`,
    `- largest alphabet: ${declaration.maxAlphabetSize}`,
    `- holds a whole message before its first bit: ${declaration.needsWholeMessage ? 'yes' : 'no'}`,
    `- worst case: ${declaration.worstCase}`,
    `- memory: ${declaration.memory}`,
    `- source: ${declaration.source}`,
    '',
    ...(declaration.parameters.length === 0
      ? ['No parameters.']
      : [
          '| key | values | default | what it sets |',
          '|---|---|---|---|',
          ...declaration.parameters.map(parameterRow),
        ]),
    '',
  ];
}

/** The project's table of all coder names and keys, as Markdown, made from what the coders declare. */
export function coderDocument(declarations: readonly Declaration[]): string {
  return [
    '# Coders, their keys and policies',
    '',
    'Made from the registry by `npm run docs`; do not edit. A candidate is written `name` or `name:key=value,key=value`; a whole',
    'number may be a range, `arith:order=0..4`.',
    '',
    '## Keys of every coder',
    '',
    '| key | values | default | what it sets |',
    '|---|---|---|---|',
    '| `tables_in_set` | 1 … 64 | one table | Tables `shipped` only: so many tables, each trained on the messages that it codes best; a message names its table in a selector of ⌈log2⌉ bits, booked in `index`. |',
    '| `stored` | `on`, `off` | `off` | `on`: a message is sent raw where that is shorter; one selector bit a message, booked in `index`. |',
    '| `after` | steps, joined by dots | none | Reversible steps before the coder, read left to right, as in `after=delta.zigzag`. |',
    '',
    'Steps of `after`:',
    '',
    ...transformFamilies.map(({ word, summary }) => `- \`${word}\`: ${summary}`),
    '',
    ...declarations.flatMap(section),
  ].join('\n');
}
