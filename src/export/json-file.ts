import { z } from 'zod';
import type { ExportedCoder } from './exporter.ts';
import type { PrintContext } from './print-c.ts';
import type { Provenance } from './provenance.ts';

const tables = z
  .record(z.string(), z.array(z.number().int().nonnegative()))
  .describe('by name, as in the exported source');

const end = z.strictObject({
  tables,
  constants: z.record(z.string(), z.number().int().nonnegative()),
});

const exportSchema = z.strictObject({
  export: z.literal(1),
  provenance: z.strictObject({
    tool: z.string(),
    candidate: z.string(),
    table_id: z.string(),
    corpus: z.string(),
    corpus_sha256: z.string(),
    train_sha256: z.string().describe('of the symbols and message ends of the train part'),
    train_symbols: z.number(),
    train_rate: z.number().describe('carried bits per symbol'),
    test_rate: z.number().optional(),
    symbols_as: z.string(),
    messages_as: z.string(),
    alphabet_size: z.number(),
    lengths: z.enum(['known', 'link', 'sent']),
    align_bits: z.number(),
    unit_symbols: z.number(),
  }),
  unseen: z.string(),
  longest_symbol_bits: z.number(),
  encoder: end,
  decoder: end,
});

export type ExportFile = z.infer<typeof exportSchema>;

/** The JSON Schema of an exported `NAME.json`. */
export function exportJsonSchema(): unknown {
  return z.toJSONSchema(exportSchema);
}

/** Checks what claims to be an exported file. @throws ZodError */
export const parseExport = (json: unknown): ExportFile => exportSchema.parse(json);

function endOf({ tables: own, constants }: PrintContext): ExportFile['encoder'] {
  return {
    tables: Object.fromEntries(own.map(({ name, values }) => [name, Array.from(values!)])),
    constants: Object.fromEntries(constants),
  };
}

/** Tables and where they come from, for a program that brings its own decoder. */
export function jsonFile(coder: ExportedCoder, provenance: Provenance): string {
  const file: ExportFile = exportSchema.parse({
    export: 1,
    provenance,
    unseen: coder.unseen,
    longest_symbol_bits: coder.longestSymbolBits,
    encoder: endOf(coder.encoder),
    decoder: endOf(coder.decoder),
  });
  return `${JSON.stringify(file, null, 1)}\n`;
}
