import { coderEntries } from '../coders/registry.ts';
import { choiceJsonSchema } from '../compare/choice.ts';
import { planJsonSchema } from '../corpus/plan-schema.ts';
import { exportJsonSchema } from '../export/json-file.ts';
import { baselineJsonSchema } from '../gate/baseline.ts';
import { runRecordJsonSchema } from '../harness/run-record.ts';
import { coderDocument } from '../report/coder-document.ts';

/** The files of `docs/` that are made from the code, by name. */
export function documents(): ReadonlyMap<string, string> {
  const json = (schema: unknown): string => `${JSON.stringify(schema, null, 2)}\n`;
  return new Map([
    ['coders.md', coderDocument(coderEntries.map((entry) => entry.declaration))],
    ['plan.schema.json', json(planJsonSchema())],
    ['run-record.schema.json', json(runRecordJsonSchema())],
    ['baseline.schema.json', json(baselineJsonSchema())],
    ['choice.schema.json', json(choiceJsonSchema())],
    ['export.schema.json', json(exportJsonSchema())],
  ]);
}
