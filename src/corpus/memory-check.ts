import { InputError } from '../errors/errors.ts';
import { megabytesText, parseByteSize } from './byte-size.ts';
import type { PlanDocument } from './plan-document.ts';
import { type Fault, keyText } from './plan-faults.ts';
import { planSchema } from './plan-schema.ts';
import { type SampleRule, sampleRule } from './sample-rule.ts';

/** The program, tables of order 2 for a byte alphabet, and a small model: with less, data cannot be read in pieces. */
const LEAST_MEMORY_BYTES = 256e6;

/**
 * Bytes that the process may hold, as a plan or an option says them.
 * @throws InputError for what is no size, or less than {@link LEAST_MEMORY_BYTES}
 */
export function readMemory(text: string): number {
  const bytes = parseByteSize(text);
  if (bytes >= LEAST_MEMORY_BYTES) return bytes;
  throw new InputError('so little memory is not enough to read data in pieces', {
    key: 'memory',
    expected: `at least ${megabytesText(LEAST_MEMORY_BYTES)}`,
    got: text,
  });
}

/** The memory and the sample of a plan, as far as they are sound, and what is wrong with them beyond the types. */
export function memoryOf(document: PlanDocument): {
  memoryBytes?: number;
  sample?: SampleRule;
  faults: Fault[];
} {
  const faults: Fault[] = [];
  const read = <T>(path: readonly string[], take: () => T): T | undefined => {
    try {
      return take();
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      const { key, expected, got, advice } = error.where;
      const within = [...path, key ?? ''];
      const at = document.has(within) ? within : path;
      faults.push({
        line: document.lineOf(at),
        key: keyText(at),
        problem: error.message,
        ...(expected === undefined ? {} : { expected }),
        ...(got === undefined ? {} : { got }),
        ...(advice === undefined ? {} : { advice }),
      });
      return undefined;
    }
  };
  const data = document.data as Readonly<Record<string, unknown>> | null | undefined;
  // What is of the wrong type is left to the schema.
  const written = planSchema
    .pick({ memory: true, sample: true })
    .safeParse({ memory: data?.['memory'], sample: data?.['sample'] });
  if (!written.success) return { faults };
  const { memory, sample } = written.data;
  const memoryBytes = memory === undefined ? undefined : read(['memory'], () => readMemory(memory));
  const rule = sample === undefined ? undefined : read(['sample'], () => sampleRule(sample));
  return {
    ...(memoryBytes === undefined ? {} : { memoryBytes }),
    ...(rule === undefined ? {} : { sample: rule }),
    faults,
  };
}
