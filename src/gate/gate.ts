import { compareCellSpeeds } from '../compare/cell-speeds.ts';
import type { RunRecord } from '../harness/run-record.ts';
import { accountGrowth, type LineGrowth } from './account-growth.ts';
import { type Allow, allowOf, isWithin } from './allow.ts';
import {
  type Baseline,
  type BaselineCell,
  type BaselineEnd,
  baselineOf,
  OPERATIONS,
} from './baseline.ts';
import { own, type PairedCell, pairCells, sharedFiles, type Unpaired } from './pairing.ts';

/**
 * `held`: as good, or worse by no more than allowed. `lost`: it held and does not any more. `open`: compared, and these samples
 * do not decide.
 */
export type GateVerdict = 'held' | 'lost' | 'better' | 'open' | 'not compared';

/** One figure of a cell against the baseline. */
export interface GateCheck {
  /** `verified`, `carried_bits`, `files`, `encode.speed`, `decoder.flash_bytes` … */
  readonly figure: string;
  readonly verdict: GateVerdict;
  readonly was?: number | boolean;
  readonly now?: number | boolean;
  /** Why it was not compared, or what a reader must know of the verdict. */
  readonly reason?: string;
}

/** A file of a cell, in bits. */
export interface FileGrowth {
  /** SHA-256; a second file of the same content ends in `#2`. */
  readonly file: string;
  readonly was: number;
  readonly now: number;
  readonly lost: boolean;
}

/** A cell against the baseline. */
export interface CellGate {
  readonly id: string;
  readonly corpus: string;
  /** The worst of its checks; `better` where bits were saved and nothing was lost. */
  readonly verdict: 'held' | 'lost' | 'better';
  readonly reference: boolean;
  readonly checks: readonly GateCheck[];
  /** Carried bits, of shared files only where the corpus has other files; absent where either failed. */
  readonly was?: number;
  readonly now?: number;
  readonly filesOnly: boolean;
  /** Lines of the account that changed; none where files are compared. */
  readonly lines: readonly LineGrowth[];
  /** Bits by which the estimate of the floor moved: lines above it move against it. */
  readonly floorMoved: number;
  /** Files that grew by most of their own size first; those that kept theirs are left out. */
  readonly files: readonly FileGrowth[];
  /** Files that only one side has. */
  readonly unpairedFiles: readonly { readonly file: string; readonly found: 'baseline' | 'run' }[];
}

/** A run against a baseline. */
export interface Gate {
  readonly verdict: 'held' | 'lost' | 'better';
  readonly title: string;
  readonly allow: Allow;
  readonly tool: { readonly was: string; readonly now: string };
  readonly cells: readonly CellGate[];
  readonly unpaired: readonly Unpaired[];
}

function bitsChecks(pair: PairedCell, files: readonly FileGrowth[], allow: Allow): GateCheck[] {
  const { now, filesOnly } = pair;
  const { was: before, now: after } = totals(pair);
  if (before === undefined || after === undefined) return [];
  const compared = { figure: 'carried_bits', was: before, now: after };
  if (now.reference === true) {
    const reason = 'a reference follows its library: its bits are not gated';
    return [{ ...compared, verdict: 'not compared', reason }];
  }
  let verdict: GateVerdict = isWithin(before, after, allow.total) ? 'held' : 'lost';
  if (after < before) verdict = 'better';
  const reason = filesOnly ? 'over the files that both have' : undefined;
  const lost = files.filter((file) => file.lost).length;
  return [
    { ...compared, verdict, ...(reason === undefined ? {} : { reason }) },
    ...(now.files === undefined
      ? []
      : [
          {
            figure: 'files',
            verdict: lost > 0 ? ('lost' as const) : ('held' as const),
            ...(lost > 0 ? { reason: `${lost} grew by more than is allowed` } : {}),
          },
        ]),
  ];
}

/** Carried bits of both sides, of shared files where the corpora differ. */
function totals({ was, now, filesOnly }: PairedCell): { was?: number; now?: number } {
  if (!was.verified || !now.verified) return {};
  if (!filesOnly) {
    return {
      ...(was.carried_bits === undefined ? {} : { was: was.carried_bits }),
      ...(now.carried_bits === undefined ? {} : { now: now.carried_bits }),
    };
  }
  const files = sharedFiles(was, now);
  return {
    was: files.reduce((sum, file) => sum + file.was, 0),
    now: files.reduce((sum, file) => sum + file.now, 0),
  };
}

const SIZES = ['flash_bytes', 'ram_bytes', 'code_bytes'] as const;
const END_FIGURES = [
  ...SIZES,
  ...OPERATIONS,
  ...OPERATIONS.map((kind) => `${kind}_worst` as const),
] satisfies (keyof BaselineEnd)[];

/** Sizes and operations of both ends: exact. */
function endChecks({ was, now }: PairedCell): GateCheck[] {
  return (['encoder', 'decoder'] as const).flatMap((end) =>
    END_FIGURES.flatMap((key): GateCheck[] => {
      const [before, after] = [was[end]?.[key], now[end]?.[key]];
      const figure = `${end}.${key}`;
      if (before === undefined) return [];
      if (after === undefined) {
        const reason = 'the coder does not tell it any more';
        return [{ figure, verdict: 'not compared', was: before, reason }];
      }
      const grown: GateVerdict = after > before ? 'lost' : 'better';
      return [{ figure, verdict: after === before ? 'held' : grown, was: before, now: after }];
    }),
  );
}

const timedOf = (id: string, { timed, encode, decode }: BaselineCell) => ({
  id,
  timed,
  encode: samplesOf(encode),
  decode: samplesOf(decode),
});

function samplesOf(times: BaselineCell['encode']) {
  if (times === undefined) return undefined;
  const { samples, unsteady } = times;
  return { seconds: samples, pacer_seconds: samples.map(() => 1), unsteady };
}

function speedCheck(
  { id, was, now }: PairedCell,
  end: 'encode' | 'decode',
  classes: readonly [string, string],
): GateCheck[] {
  const [before, after] = [was[end], now[end]];
  if (before === undefined) return [];
  const figure = `${end}.speed`;
  if (after === undefined) {
    return [{ figure, verdict: 'not compared', was: before.speed, reason: 'not timed' }];
  }
  const speeds = { figure, was: before.speed, now: after.speed };
  const found = compareCellSpeeds(
    { environment: { class: classes[0] }, cell: timedOf(id, was) },
    { environment: { class: classes[1] }, cell: timedOf(id, now) },
    end,
  );
  if (typeof found === 'string') return [{ ...speeds, verdict: 'not compared', reason: found }];
  const [low, high] = [found.low, found.high].map((ratio) => ratio.toPrecision(3));
  const interval = `takes ${low} to ${high} times as long`;
  const uneven = found.unsteady && found.verdict === 'slower';
  // An uneven machine may have been slow all through one of two runs: time again before a build fails by it.
  if (uneven) {
    const reason = `${interval}, on an uneven machine: time it again`;
    return [{ ...speeds, verdict: 'open', reason }];
  }
  const verdicts = { slower: 'lost', faster: 'better', alike: 'held', undecided: 'open' } as const;
  return [{ ...speeds, verdict: verdicts[found.verdict], reason: interval }];
}

function filesOf({ was, now }: PairedCell, allow: Allow): FileGrowth[] {
  return sharedFiles(was, now)
    .filter((file) => file.now !== file.was)
    .map((file) => ({ ...file, lost: !isWithin(file.was, file.now, allow.each_file) }))
    .sort((a, b) => share(b) - share(a) || b.now - b.was - (a.now - a.was));
}

const share = ({ was, now }: { was: number; now: number }): number =>
  was === 0 ? Number.POSITIVE_INFINITY : (now - was) / was;

function unpairedFilesOf({ was, now }: PairedCell): CellGate['unpairedFiles'] {
  const shared = new Set(sharedFiles(was, now).map(({ file }) => file));
  const others = (cell: BaselineCell, found: 'baseline' | 'run') =>
    Object.keys(cell.files ?? {})
      .filter((file) => !shared.has(file))
      .map((file) => ({ file, found }));
  return [...others(was, 'baseline'), ...others(now, 'run')];
}

/** Verification, which nothing excuses; a cell that failed before has nothing to lose. */
function verifiedCheck({ was, now }: PairedCell, failure: string | undefined): GateCheck {
  const values = { figure: 'verified', was: was.verified, now: now.verified };
  if (!was.verified && !now.verified) {
    const reason = `failed in the baseline already${failure === undefined ? '' : `: ${failure}`}`;
    return { ...values, verdict: 'not compared', reason };
  }
  if (now.verified) return { ...values, verdict: was.verified ? 'held' : 'better' };
  return { ...values, verdict: 'lost', ...(failure === undefined ? {} : { reason: failure }) };
}

/** What a cell takes on a device, and how fast it is: only over the same data. */
function deviceChecks(pair: PairedCell, classes: readonly [string, string]): GateCheck[] {
  if (pair.filesOnly) {
    const reason = `${pair.now.corpus} has other files`;
    return [{ figure: 'sizes, operations and speeds', verdict: 'not compared', reason }];
  }
  const ends = ['encode', 'decode'] as const;
  return [...endChecks(pair), ...ends.flatMap((end) => speedCheck(pair, end, classes))];
}

/** A speed that is better asks for no new baseline: it may be the machine. */
function worstOf(parts: readonly { readonly verdict: GateVerdict }[]): CellGate['verdict'] {
  if (parts.some(({ verdict }) => verdict === 'lost')) return 'lost';
  return parts.some(({ verdict }) => verdict === 'better') ? 'better' : 'held';
}

function gateCell(
  pair: PairedCell,
  allow: Allow,
  classes: readonly [string, string],
  failure: string | undefined,
): CellGate {
  const { id, was, now, filesOnly } = pair;
  const reference = now.reference === true;
  const both = was.verified && now.verified;
  const files = both ? filesOf(pair, allow) : [];
  const verified = verifiedCheck(pair, failure);
  const checks = [
    verified,
    ...bitsChecks(pair, files, allow),
    ...(both && !reference ? deviceChecks(pair, classes) : []),
  ];
  const verdict = worstOf(
    checks.filter((c) => c.verdict === 'lost' || !c.figure.endsWith('.speed')),
  );
  return {
    id,
    corpus: now.corpus,
    verdict,
    reference,
    checks,
    ...totals(pair),
    filesOnly,
    lines: both && !filesOnly ? accountGrowth(was, now) : [],
    floorMoved: both && !filesOnly ? (now.account?.floor ?? 0) - (was.account?.floor ?? 0) : 0,
    files,
    unpairedFiles: both ? unpairedFilesOf(pair) : [],
  };
}

/**
 * Holds a run against a baseline: bits exactly, up to what is allowed; sizes and operations exactly; speeds by interval within
 * one class of machine; verification always. Bits of references are never gated.
 * @param allow  absent: what the plan of the run allows
 */
export function gateRun(
  baseline: Baseline,
  record: RunRecord,
  allow: Allow = allowOf(record.plan.gate),
): Gate {
  const run = baselineOf(record);
  const { pairs, unpaired } = pairCells(baseline, run);
  const classes = [baseline.environment.class, run.environment.class] as const;
  const failures: Record<string, string> = {};
  for (const { id, failure } of record.cells) if (failure !== undefined) failures[id] = failure;
  const cells = pairs.map((pair) => gateCell(pair, allow, classes, own(failures, pair.id)));
  return {
    verdict: worstOf(cells),
    title: record.plan.title,
    allow,
    tool: { was: baseline.tool.version, now: run.tool.version },
    cells,
    unpaired,
  };
}

/** A gate as JSON: keys in snake_case, nothing that is not asked for. */
export function gateJson(gate: Gate): unknown {
  return {
    gate: 1,
    verdict: gate.verdict,
    title: gate.title,
    allow: gate.allow,
    tool: gate.tool,
    cells: gate.cells.map(({ filesOnly, unpairedFiles, floorMoved, ...cell }) => ({
      ...cell,
      files_only: filesOnly,
      floor_moved: floorMoved,
      unpaired_files: unpairedFiles,
    })),
    unpaired: gate.unpaired,
  };
}
