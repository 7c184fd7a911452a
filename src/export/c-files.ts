import type { Setup } from '../coders/contract.ts';
import type { ExportedCoder } from './exporter.ts';
import { elementBytesFor } from './exporter.ts';
import { COUNT_BITS, STATUS } from './frame-program.ts';
import { CPrinter, type PrintContext, stateMembers, tableText } from './print-c.ts';

/** What the printed files are called, and say of themselves. */
export interface FileNaming {
  /** Prefix of every public name: letters, digits and underscores. */
  readonly name: string;
  /** Lines of where the tables come from, cautions included. */
  readonly provenance: readonly string[];
}

const commentBlock = (lines: readonly string[]): string =>
  [
    '/*',
    ...lines.map((line) => (line === '' ? ' *' : ` * ${line.replaceAll('*/', '* /')}`)),
    ' */',
  ].join('\n');

const STATUS_WORDS: Readonly<Record<keyof typeof STATUS, string>> = {
  OK: 'Done.',
  FULL: 'The output has no room for the whole message; what stands there is none.',
  SYMBOL: 'A symbol lies outside the alphabet.',
  COUNT: 'The symbols are not whole units, or too many for one message.',
  CORRUPT: 'No encoder with these tables writes such bytes; what stands in the output is none.',
  CAPACITY: 'The message holds more symbols than there is room for.',
};

function signatures(name: string, { lengths }: Setup): { encode: string; decode: string } {
  return {
    encode: `uint32_t ${name}_encode(const ${name}_symbol *symbols, uint32_t count,\n    uint8_t *out, uint32_t out_bytes, uint32_t *coded_bytes)`,
    decode:
      lengths === 'known'
        ? `uint32_t ${name}_decode(const uint8_t *in, uint32_t in_bytes,\n    ${name}_symbol *symbols, uint32_t count, uint32_t *used_bytes)`
        : `uint32_t ${name}_decode(const uint8_t *in, uint32_t in_bytes,\n    ${name}_symbol *symbols, uint32_t capacity, uint32_t *count, uint32_t *used_bytes)`,
  };
}

function decodeDoc({ lengths }: Setup): string {
  if (lengths === 'known')
    return 'Decodes one message of `count` symbols; `in` may go on behind it.';
  if (lengths === 'link') return 'Decodes the message that is exactly `in_bytes` long.';
  return 'Decodes one message; `in` may go on behind it.';
}

function header(coder: ExportedCoder, setup: Setup, naming: FileNaming): string {
  const { name, provenance } = naming;
  const upper = name.toUpperCase();
  const { encode, decode } = signatures(name, setup);
  const align = setup.align / 8;
  const frameBits = (setup.lengths === 'known' ? 0 : COUNT_BITS) + coder.endingBits + 7;
  return `${commentBlock(provenance)}
#ifndef ${upper}_H
#define ${upper}_H

#include <stdint.h>

/* A symbol, 0 to ${setup.alphabetSize - 1}. */
typedef uint${elementBytesFor(setup.alphabetSize - 1) * 8}_t ${name}_symbol;

${Object.entries(STATUS)
  .map(
    ([word, value]) =>
      `/* ${STATUS_WORDS[word as keyof typeof STATUS]} */\n#define ${upper}_${word} ${value}u`,
  )
  .join('\n')}

/* No message of so many symbols takes more bytes. */
#define ${upper}_MOST_BYTES(count) \\
    (((uint64_t)(count) * ${coder.longestSymbolBits}u + ${frameBits}u) / 8u + ${align - 1}u)

/* Codes \`count\` symbols as one message${align > 1 ? ` of whole ${align}-byte words` : ''}. */
${encode};

/* ${decodeDoc(setup)} */
${decode};

#endif
`;
}

function sourceFile(
  context: PrintContext,
  naming: FileNaming,
  signature: string,
  start: readonly string[],
  end: readonly string[],
): string {
  const printer = new CPrinter(context);
  const { used } = printer;
  const constants = [...context.constants].filter(([name]) => used.has(name));
  const members = stateMembers(context, used);
  const buffers = new Set(context.buffers.map((b) => b.name));
  const scalars = context.program.state.filter((name) => used.has(name) && !buffers.has(name));
  return `${commentBlock(naming.provenance)}
#include "${naming.name}.h"

${constants.map(([word, value]) => `#define ${word} ${value}u`).join('\n')}

${context.tables
  .filter((table) => used.has(table.name))
  .map(tableText)
  .join('\n')}
struct state {
${members.join('\n')}
};

${printer.print()}
${signature}
{
    struct state state;
    struct state *s = &state;
${scalars.map((name) => `    s->${name} = 0u;`).join('\n')}
${[...start, ...end].map((line) => `    ${line}`).join('\n')}
}
`;
}

/** The C99 files of a coder, by file name: header, encoder and decoder. */
export function cFiles(
  coder: ExportedCoder,
  setup: Setup,
  naming: FileNaming,
): ReadonlyMap<string, string> {
  const { name } = naming;
  const { encode, decode } = signatures(name, setup);
  const known = setup.lengths === 'known';
  return new Map([
    [`${name}.h`, header(coder, setup, naming)],
    [
      `${name}_encode.c`,
      sourceFile(
        coder.encoder,
        naming,
        encode,
        ['s->symbols = symbols;', 's->out = out;', 's->out_end = out_bytes;'],
        ['encode_message(s, count);', '*coded_bytes = s->out_at;', 'return s->status;'],
      ),
    ],
    [
      `${name}_decode.c`,
      sourceFile(
        coder.decoder,
        naming,
        decode,
        ['s->in = in;', 's->symbols = symbols;', 's->in_end = in_bytes;'],
        [
          known ? 'decode_message(s, count);' : '*count = decode_message(s, capacity);',
          '*used_bytes = s->in_at;',
          'return s->status;',
        ],
      ),
    ],
  ]);
}
