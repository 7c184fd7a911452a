import { dirname } from 'node:path';
import { InputError } from '../errors/errors.ts';
import { parseByteSize } from './byte-size.ts';
import type { CorpusSpec } from './corpus.ts';
import type { SplitRule } from './decide-split.ts';
import { memoryOf } from './memory-check.ts';
import { readCorpusSpecs, schemaFaults, togetherFaults } from './plan-check.ts';
import { type PlanDocument, readPlanDocument } from './plan-document.ts';
import { planError } from './plan-faults.ts';
import { laterFaults } from './plan-later.ts';
import { type PlanFile, planSchema } from './plan-schema.ts';
import { readInputFile } from './read-file.ts';
import { varyFaults } from './vary-check.ts';

/** A plan that this version can run. */
export interface Plan {
  /** Path of the plan file, as it was given. */
  readonly file: string;
  /** The folder that the files of its corpora are relative to. */
  readonly folder: string;
  readonly title?: string;
  readonly corpora: readonly CorpusSpec[];
  readonly split: SplitRule;
  /** Values besides the plan's own that cells are run for, in all their combinations. */
  readonly vary: {
    readonly trainShares?: readonly number[];
    readonly messageSymbols?: readonly number[];
    readonly aligns?: readonly number[];
  };
  /** Line of a key in the file, for errors that only the data show. */
  lineOf(...path: readonly string[]): number;
  /** As written; ranges are not opened yet. */
  readonly candidates: readonly string[];
  /** Line of each candidate in the file. */
  readonly candidateLines: readonly number[];
  readonly tables: readonly ('shipped' | 'sent' | 'learned' | 'primed')[];
  readonly reset: readonly ('message' | 'file' | 'never' | `message*${number}`)[];
  /** Share of messages lost on the way, 0 … 1, where the plan gives one. */
  readonly lossRate?: number;
  /** Damage to coded messages that is simulated, where the plan asks. */
  readonly damage?: PlanFile['damage'];
  /** Bytes in which the link bills each message, where the plan says. */
  readonly billStepBytes?: number;
  /** Bytes that the process may hold, where the plan says. */
  readonly memoryBytes?: number;
  /** What a cell may take before it is stopped, where the plan says. */
  readonly budget: { readonly cellSeconds?: number; readonly cellMemoryBytes?: number };
  /** The small end of the product, where the plan names it. */
  readonly device?: 'encoder' | 'decoder';
  /** What a choice is made by, and a gate; only what the plan says. */
  readonly decision: Pick<PlanFile, 'limits' | 'cost' | 'gate'> & {
    readonly weights?: Record<string, number>;
  };
  readonly align: 1 | 8 | 16 | 32 | 64;
  readonly check: 'none';
  /** Samples of each end, 0 for no times, and the candidate that speeds are multiples of. */
  readonly timing: { readonly repeats: number; readonly pacer: string };
  /** What the file leaves open and was chosen for it, as it would be written there; for screens. */
  readonly chosen: readonly string[];
  /** The file's own data, keys in snake_case. */
  readonly written: PlanFile;
}

const USUAL_TABLES = ['shipped', 'sent', 'learned'] as const;
const USUAL_SPLIT = { by: 'message', order: 'in_time', train: 0.5 } as const;
const USUAL_SEED = 1;

/**
 * Reads and checks a plan file.
 * @throws InputError that lists every fault with its line, or NotYetError when all it asks too much is not built yet
 */
export async function readPlan(path: string): Promise<Plan> {
  const bytes = await readInputFile(path, path);
  let text: string;
  try {
    text = new TextDecoder('utf-8', { fatal: true }).decode(bytes);
  } catch (error) {
    throw new InputError(
      `${path} is not UTF-8 text`,
      { file: path, expected: 'a plan in YAML' },
      error,
    );
  }
  return parsePlan(text, path);
}

/**
 * Checks the text of a plan.
 * @param file  its path: named in errors, and its folder is where corpora are looked for
 * @throws as {@link readPlan}
 */
export function parsePlan(text: string, file: string): Plan {
  const document = readPlanDocument(text);
  if (document.faults.length > 0) throw planError(file, document.faults);
  const checked = planSchema.safeParse(document.data);
  const { memoryBytes, sample, faults: memoryFaults } = memoryOf(document);
  const { specs, faults: corpusFaults } = readCorpusSpecs(document, sample);
  const faults = [
    ...(checked.success ? [] : schemaFaults(checked.error.issues, document)),
    ...corpusFaults,
    ...memoryFaults,
    ...togetherFaults(document),
    ...varyFaults(document, specs),
    ...laterFaults(document),
  ];
  if (faults.length > 0 || !checked.success) throw planError(file, faults);
  const plan = planOf(checked.data, specs, document, file);
  return memoryBytes === undefined ? plan : { ...plan, memoryBytes };
}

function decisionOf({ limits, cost, gate, corpora }: PlanFile): Plan['decision'] {
  const weights = Object.entries(corpora).flatMap(([name, { weight }]) =>
    weight === undefined ? [] : [[name, weight] as const],
  );
  return {
    ...(limits === undefined ? {} : { limits }),
    ...(cost === undefined ? {} : { cost }),
    ...(gate === undefined ? {} : { gate }),
    ...(weights.length === 0 ? {} : { weights: Object.fromEntries(weights) }),
  };
}

function planOf(
  written: PlanFile,
  corpora: CorpusSpec[],
  document: PlanDocument,
  file: string,
): Plan {
  const { split = {}, timing = {}, vary = {}, budget = {} } = written;
  const by = split.by ?? USUAL_SPLIT.by;
  const order = split.order ?? USUAL_SPLIT.order;
  const train = split.train ?? USUAL_SPLIT.train;
  const chosen: string[] = [];
  // Folds leave no order or share open.
  const open = split.folds === undefined ? (['by', 'order', 'train'] as const) : (['by'] as const);
  for (const key of open)
    if (split[key] === undefined) chosen.push(`split.${key}: ${USUAL_SPLIT[key]}`);
  if (order === 'random' && split.seed === undefined) chosen.push(`split.seed: ${USUAL_SEED}`);
  if (written.tables === undefined) chosen.push(`tables: [${USUAL_TABLES.join(', ')}]`);
  if (written.reset === undefined) chosen.push('reset: [message]');
  if (written.align === undefined) chosen.push('align: 8');
  if (timing.repeats === undefined) chosen.push('timing.repeats: 20');
  if (written.damage !== undefined && written.damage.seed === undefined)
    chosen.push(`damage.seed: ${USUAL_SEED}`);
  return {
    file,
    folder: dirname(file),
    ...(written.title === undefined ? {} : { title: written.title }),
    corpora,
    split: {
      by,
      order,
      train,
      ...(order === 'random' ? { seed: split.seed ?? USUAL_SEED } : {}),
      ...(split.folds === undefined ? {} : { folds: split.folds }),
    },
    vary: {
      ...(vary.train_share === undefined ? {} : { trainShares: vary.train_share }),
      ...(vary.message_symbols === undefined ? {} : { messageSymbols: vary.message_symbols }),
      ...(vary.align === undefined ? {} : { aligns: vary.align }),
    },
    lineOf: (...path) => document.lineOf(path),
    candidates: written.candidates,
    candidateLines: written.candidates.map((_, i) => document.lineOf(['candidates', i])),
    tables: written.tables ?? USUAL_TABLES,
    reset: (written.reset ?? ['message']) as Plan['reset'],
    align: written.align ?? 8,
    ...(written.loss === undefined ? {} : { lossRate: written.loss.rate }),
    ...(written.damage === undefined ? {} : { damage: { seed: USUAL_SEED, ...written.damage } }),
    ...(written.cost?.bill_step_bytes === undefined
      ? {}
      : { billStepBytes: written.cost.bill_step_bytes }),
    budget: {
      ...(budget.cell_seconds === undefined ? {} : { cellSeconds: budget.cell_seconds }),
      ...(budget.cell_memory === undefined
        ? {}
        : { cellMemoryBytes: parseByteSize(budget.cell_memory) }),
    },
    ...(written.product === undefined ? {} : { device: written.product.device }),
    decision: decisionOf(written),
    check: 'none',
    timing: { repeats: timing.repeats ?? 20, pacer: timing.pacer ?? 'deflate-huffman' },
    chosen,
    written,
  };
}
