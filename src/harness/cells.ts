import type { Candidate } from '../coders/candidate.ts';
import type { Reset, TablePolicy, UnitReset } from '../coders/contract.ts';
import { InputError } from '../errors/errors.ts';
import type { Variation } from './variation.ts';

/** What is run, timed and reported: a candidate on a corpus under one table policy and one reset. */
export interface Cell {
  /** `corpus/candidate@policy/reset`, then what the plan varies. */
  readonly id: string;
  /** Name of the corpus. */
  readonly corpus: string;
  /** Key of the corpus data that it codes ({@link CorpusData.key}): the name, and what the plan varies. */
  readonly dataKey: string;
  /** What it differs in from the plan's own; absent where nothing is varied. */
  readonly vary?: Variation;
  /** Each message's bits are padded to a multiple of this. */
  readonly align: number;
  readonly candidate: Candidate;
  readonly policy: TablePolicy;
  /** Always `message` for `shipped` and `none`, which have nothing to forget. */
  readonly reset: Reset;
}

export interface CellList {
  readonly cells: readonly Cell[];
  /** Combinations of candidate, policy and reset that the candidate does not declare. */
  readonly undeclared: number;
  /** Combinations that the candidate declares, but where messages could not be filled, since they do not decode alone. */
  readonly notFilled: number;
}

/** The policies that the plan asks for and the candidate declares; `none` when the candidate declares only that. */
function policiesOf(candidate: Candidate, asked: readonly TablePolicy[]): TablePolicy[] {
  const declared = candidate.declaration.policies;
  if (declared.includes('none')) return ['none'];
  return asked.filter((policy) => declared.includes(policy));
}

/** Names of corpora that differ in what cells they can have. */
export interface CorpusTraits {
  /** Messages are filled to a budget. */
  readonly filled?: ReadonlySet<string>;
  /** Symbols are the bytes of records. */
  readonly records?: ReadonlySet<string>;
  /** Of all cells; 8 unless said. */
  readonly align?: number;
}

/**
 * Every cell of the given corpora and candidates, candidates within corpora, in the order given.
 * @throws InputError for a candidate that has no cell at all, or that stands twice in the list
 */
export function listCells(
  corpora: readonly string[],
  candidates: readonly Candidate[],
  policies: readonly TablePolicy[],
  resets: readonly Reset[],
  { filled = new Set(), records = new Set(), align = 8 }: CorpusTraits = {},
): CellList {
  const cells: Cell[] = [];
  let undeclared = 0;
  let notFilled = 0;
  const seen = new Set<string>();
  for (const candidate of candidates) {
    if (seen.has(candidate.id))
      throw new InputError(`the candidate ${candidate.id} is listed twice`);
    seen.add(candidate.id);
  }
  for (const corpus of corpora) {
    for (const candidate of candidates) {
      // A coder of records is for the corpora that have them, if any of the plan has.
      if (candidate.declaration.needsRecord && records.size > 0 && !records.has(corpus)) {
        undeclared += policies.length * resets.length;
        continue;
      }
      const used = policiesOf(candidate, policies);
      if (!candidate.declaration.policies.includes('none')) {
        undeclared += (policies.length - used.length) * resets.length;
      }
      const before = cells.length;
      for (const policy of used) {
        const own: readonly Reset[] =
          policy === 'shipped' || policy === 'none' ? ['message'] : resets;
        for (const reset of own) {
          if (own === resets && !declaresReset(candidate, reset)) {
            undeclared++;
            continue;
          }
          if (reset !== 'message' && filled.has(corpus)) {
            notFilled++;
            continue;
          }
          cells.push({
            id: `${corpus}/${candidate.id}@${policy}/${reset}`,
            corpus,
            dataKey: corpus,
            align,
            candidate,
            policy,
            reset,
          });
        }
      }
      if (cells.length === before) {
        throw new InputError(`${candidate.id} has no cell under the tables and resets asked for`, {
          coder: candidate.id,
          expected: `tables ${candidate.declaration.policies.join(', ')}; resets ${candidate.declaration.resets.join(', ')}`,
          got: `tables ${policies.join(', ')}; resets ${resets.join(', ')}`,
          advice: filled.has(corpus)
            ? `Messages of ${corpus} are filled, which takes reset message or shipped tables.`
            : 'Leave the candidate out, or ask for tables and a reset that it declares.',
        });
      }
    }
  }
  return { cells, undeclared, notFilled };
}

/** Coders that can run on over message ends at all can also forget every R messages. */
function declaresReset(candidate: Candidate, reset: Reset): boolean {
  const declared = candidate.declaration.resets;
  if (reset === 'message' || reset === 'file' || reset === 'never') return declared.includes(reset);
  return declared.includes('never');
}

/** The reset within a unit: the harness runs reset `file` as one unit a file. */
export function unitResetOf(cell: Cell): UnitReset {
  return cell.reset === 'message' ? 'message' : 'never';
}

/** Whether a message can be decoded without any earlier one. */
export function decodesAlone(cell: Cell): boolean {
  return cell.policy === 'shipped' || cell.reset === 'message';
}
