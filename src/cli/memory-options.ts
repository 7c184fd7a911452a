import type { Command } from 'commander';
import { readMemory } from '../corpus/memory-check.ts';
import type { Plan } from '../corpus/plan.ts';
import { parseSampleRule, type SampleRule } from '../corpus/sample-rule.ts';

/** Options of commands that may meet more data than memory holds. */
export interface MemoryOptions {
  /** Bytes. */
  readonly memory?: number;
  readonly sample?: SampleRule;
}

export function addMemoryOptions(command: Command): Command {
  return command
    .option(
      '--memory <size>',
      'what the process may hold, as in 512MB: larger data are read in pieces, for huffman and arith',
      readMemory,
    )
    .option(
      '--sample <how>',
      'read blocks of the files only: every=12,block=1MB or reservoir=64MB,block=1MB,seed=7',
      parseSampleRule,
    );
}

/** A plan with what the options say in the place of its own. */
export function withMemoryOptions(plan: Plan, { memory, sample }: MemoryOptions): Plan {
  return {
    ...plan,
    ...(memory === undefined ? {} : { memoryBytes: memory }),
    ...(sample === undefined ? {} : { corpora: plan.corpora.map((spec) => ({ ...spec, sample })) }),
  };
}
