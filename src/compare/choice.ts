import { z } from 'zod';
import { toolVersion } from '../harness/environment.ts';
import type { MessagePairs } from '../harness/run-all.ts';
import type { RunRecord } from '../harness/run-record.ts';
import type { DeviceEnd } from './cell-figures.ts';
import { type CorporaChoice, chooseAcross } from './choose-corpora.ts';
import { type ChoiceTerms, type CorpusChoice, chooseForCorpus } from './choose-corpus.ts';
import { type Sensitivity, sensitivities } from './sensitivity.ts';

/** The choice of a run, before it is written or shown. */
export interface RunChoice {
  readonly terms: ChoiceTerms;
  readonly corpora: readonly (CorpusChoice & { readonly sensitivities: readonly Sensitivity[] })[];
  readonly across?: CorporaChoice;
}

/** What the plan of a record asks of a choice. */
function termsOf({ plan }: RunRecord): ChoiceTerms {
  const end: DeviceEnd = plan.product?.device ?? 'both';
  return { limits: plan.limits ?? {}, cost: plan.cost ?? {}, end };
}

/** Chooses for each corpus of a run, and across them. */
export function chooseFromRun(
  record: RunRecord,
  messages: ReadonlyMap<string, MessagePairs>,
): RunChoice {
  const terms = termsOf(record);
  const corpora = record.corpora
    .filter(({ name }) => record.cells.some((cell) => cell.corpus === name))
    .map(({ name }) => {
      const choice = chooseForCorpus(record, messages, name, terms);
      return { ...choice, sensitivities: sensitivities(choice.alternatives, choice.goal, terms) };
    });
  const symbolCounts = new Map(record.corpora.map((c) => [c.name, c.symbol_count]));
  const across = chooseAcross(corpora, symbolCounts, record.plan.weights ?? {});
  return { terms, corpora, ...(across === undefined ? {} : { across }) };
}

const verdict = z.strictObject({
  key: z.string(),
  limit: z.union([z.number(), z.string()]),
  value: z.union([z.number(), z.string()]).optional(),
  low: z.number().optional(),
  high: z.number().nullable().optional().describe('null: not bounded by these data'),
  verdict: z.enum(['pass', 'fail', 'unknown']),
  certain: z.boolean().describe('the interval lies on one side of the limit'),
  margin: z.number().optional().describe('room as a share of the limit'),
});

const shared = z.strictObject({
  coder: z.string(),
  weighted_regret: z.number(),
  worst_regret: z.number(),
  regrets: z.record(z.string(), z.number()).describe('rate over the least there, less 1'),
});

/** `choice.json`: what was chosen, and all that it was chosen by. */
export const choiceSchema = z.strictObject({
  choice: z.literal(1),
  tool: z.strictObject({ name: z.literal('bitassay'), version: z.string() }),
  device: z.enum(['encoder', 'decoder', 'both']),
  corpora: z.array(
    z.strictObject({
      corpus: z.string(),
      sha256: z.string(),
      goal: z.enum(['yearly cost', 'units per message', 'rate']),
      pick: z.string().optional().describe('absent: nothing meets the limits'),
      runner_up: z.string().optional(),
      tied_with: z.array(z.string()).describe('cells that this corpus cannot tell from the best'),
      nearest: z.array(
        z.strictObject({
          id: z.string(),
          gives: z.array(
            z.strictObject({
              key: z.string(),
              limit: z.union([z.number(), z.string()]),
              needed: z.union([z.number(), z.string()]),
            }),
          ),
        }),
      ),
      cells: z.array(
        z.strictObject({
          id: z.string(),
          meets: z.boolean(),
          limits: z.array(verdict),
          rank: z.number().optional(),
          on_front: z.boolean(),
          dominated_by: z.string().optional(),
          yearly_bytes: z.number().optional(),
          yearly_cost: z.number().optional(),
        }),
      ),
      break_evens: z.array(
        z.strictObject({
          cheaper: z.string(),
          smaller: z.string(),
          extra_flash_bytes: z.number(),
          extra_ram_bytes: z.number(),
          saved_per_device_year: z.number(),
        }),
      ),
      sensitivities: z.array(
        z.strictObject({
          key: z.string(),
          at: z.number(),
          stretches: z.array(
            z.strictObject({ from: z.number(), to: z.number(), pick: z.string().optional() }),
          ),
        }),
      ),
    }),
  ),
  across: z
    .strictObject({
      weights: z.record(z.string(), z.number()),
      shared: z.array(shared),
      least_worst: z.string().optional(),
    })
    .optional(),
});

export type ChoiceFile = z.infer<typeof choiceSchema>;

/** The published JSON Schema of `choice.json`. */
export function choiceJsonSchema(): unknown {
  return z.toJSONSchema(choiceSchema);
}

/** A choice as it is kept beside its run. */
export function choiceFileOf(record: RunRecord, { terms, corpora, across }: RunChoice): ChoiceFile {
  return {
    choice: 1,
    tool: { name: 'bitassay', version: toolVersion() },
    device: terms.end,
    corpora: corpora.map((choice) => ({
      corpus: choice.corpus,
      sha256: record.corpora.find((c) => c.name === choice.corpus)!.sha256,
      goal: choice.goal,
      ...(choice.pick === undefined ? {} : { pick: choice.pick.cell.id }),
      ...(choice.runnerUp === undefined ? {} : { runner_up: choice.runnerUp.cell.id }),
      tied_with: [...choice.tiedWith],
      nearest: choice.nearest.map(({ id, gives }) => ({ id, gives: gives.map((g) => ({ ...g })) })),
      cells: choice.alternatives.map((a) => ({
        id: a.cell.id,
        meets: a.meets,
        limits: a.verdicts.map((v) => {
          const { high, ...rest } = v;
          if (high === undefined) return rest;
          return { ...rest, high: Number.isFinite(high) ? high : null };
        }),
        ...(a.rank === undefined ? {} : { rank: a.rank }),
        on_front: a.onFront,
        ...(a.dominatedBy === undefined ? {} : { dominated_by: a.dominatedBy }),
        ...(a.cost === undefined ? {} : { yearly_bytes: a.cost.bytes, yearly_cost: a.cost.cost }),
      })),
      break_evens: choice.breakEvens.map((b) => ({
        cheaper: b.cheaper,
        smaller: b.smaller,
        extra_flash_bytes: b.extraFlashBytes,
        extra_ram_bytes: b.extraRamBytes,
        saved_per_device_year: b.savedPerDeviceYear,
      })),
      sensitivities: choice.sensitivities.map(({ key, at, stretches }) => ({
        key,
        at,
        stretches: stretches.map((s) => ({ ...s })),
      })),
    })),
    ...(across === undefined
      ? {}
      : {
          across: {
            weights: Object.fromEntries(across.weights),
            shared: across.shared.map((s) => ({
              coder: s.coder,
              weighted_regret: s.weightedRegret,
              worst_regret: s.worstRegret,
              regrets: Object.fromEntries(s.regrets),
            })),
            ...(across.leastWorst === undefined ? {} : { least_worst: across.leastWorst.coder }),
          },
        }),
  };
}
