import type { Setup } from '../coders/contract.ts';
import type { FileNaming } from './c-files.ts';
import type { ExportedCoder } from './exporter.ts';
import { elementBytesFor } from './exporter.ts';
import { COUNT_BITS } from './frame-program.ts';
import type { PrintContext } from './print-c.ts';
import { arrayTypeTs, TsPrinter, tableTextTs } from './print-ts.ts';

/** One end in a scope of its own, so that both may use the same names. */
function endScope(context: PrintContext, call: readonly string[], signature: string): string {
  const printer = new TsPrinter(context);
  const { used } = printer;
  const indent = (text: string): string => text.replace(/^(?=.)/gm, '  ');
  const state = context.program.state.filter((name) => used.has(name));
  const lines = [
    ...[...context.constants]
      .filter(([name]) => used.has(name) || name === 'OK')
      .map(([name, value]) => `const ${name} = ${value};`),
    ...context.tables
      .filter((table) => used.has(table.name))
      .map((table) => tableTextTs(table).trimEnd()),
    ...context.buffers
      .filter((b) => used.has(b.name))
      .map((b) => `let ${bufferName(b.name)}: ${arrayTypeTs(b.elementBytes)};`),
    ...state.map((name) => `let ${name} = 0;`),
    ...[...context.program.stateArrays]
      .filter(([name]) => used.has(name))
      .map(([name, length]) => `const ${name} = new Uint32Array(${length});`),
    '',
    printer.print(),
    `return ${signature} => {`,
    ...state.map((name) => `  ${name} = 0;`),
    ...call.map((line) => `  ${line}`),
    '};',
  ];
  return indent(lines.join('\n'));
}

/** `in` is a word of the language. */
const bufferName = (name: string): string => (name === 'in' ? 'bytes_in' : name);

/**
 * A TypeScript module with `encode` and `decode`, which imports nothing.
 * @param typed  false: the same without its types, to be run as it is
 */
export function tsFile(
  coder: ExportedCoder,
  setup: Setup,
  naming: FileNaming,
  typed = true,
): string {
  const text = moduleText(coder, setup, naming);
  return typed ? text : withoutTypes(text);
}

/** The printer puts types in three places only: parameters, results, and buffers. */
function withoutTypes(text: string): string {
  return text
    .replace(
      /^( *function \w+\()([^)]*)\): \w+ \{$/gm,
      (_, start: string, list: string) => `${start}${list.replaceAll(': number', '')}) {`,
    )
    .replace(/^( *let \w+): \w+;$/gm, '$1;')
    .replace(
      /^( *return \()([^)]*)\): [^=]* => \{$/gm,
      (_, start: string, list: string) => `${start}${list.replace(/: \w+/g, '')}) => {`,
    );
}

function moduleText(coder: ExportedCoder, setup: Setup, naming: FileNaming): string {
  const symbolArray = arrayTypeTs(elementBytesFor(setup.alphabetSize - 1));
  const known = setup.lengths === 'known';
  const align = setup.align / 8;
  const frameBits = (known ? 0 : COUNT_BITS) + coder.endingBits + 7;
  const encode = endScope(
    coder.encoder,
    [
      'symbols = message;',
      `out = new Uint8Array(Math.floor((message.length * ${coder.longestSymbolBits} + ${frameBits}) / 8) + ${align - 1});`,
      'out_end = out.length;',
      'encode_message(message.length);',
      "if (status !== OK) throw new RangeError('the message cannot be coded: status ' + status);",
      'return out.slice(0, out_at);',
    ],
    `(message: ${symbolArray}): Uint8Array`,
  );
  const decode = endScope(
    coder.decoder,
    [
      'bytes_in = coded;',
      'in_end = coded.length;',
      ...(known
        ? [`symbols = new ${symbolArray}(count);`, 'decode_message(count);']
        : [`symbols = new ${symbolArray}(capacity);`, 'const count = decode_message(capacity);']),
      "if (status !== OK) throw new RangeError('the bytes cannot be decoded: status ' + status);",
      'return { symbols: symbols.subarray(0, count), usedBytes: in_at };',
    ],
    `(coded: Uint8Array, ${known ? 'count' : 'capacity'}: number): { symbols: ${symbolArray}; usedBytes: number }`,
  ).replaceAll(/\bin\[/g, 'bytes_in[');
  return `/*
${naming.provenance.map((line) => (line === '' ? ' *' : ` * ${line.replaceAll('*/', '* /')}`)).join('\n')}
 */

/** Codes one message. Throws RangeError for what cannot be coded. */
export const encode = (() => {
${encode}
})();

/** Decodes one message. Throws RangeError for bytes that no encoder with these tables writes. */
export const decode = (() => {
${decode}
})();
`;
}
