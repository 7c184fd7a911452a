import type { RunRecord } from '../harness/run-record.ts';
import { accountGrowth, type LineGrowth } from './account-growth.ts';
import { type Allow, allowOf, isWithin } from './allow.ts';
import { type Baseline, type BaselineCell, baselineOf } from './baseline.ts';
import { deviceChecks } from './device-checks.ts';
import type { GateCheck, GateVerdict } from './gate-check.ts';
import { own, type PairedCell, pairCells, sharedFiles, type Unpaired } from './pairing.ts';

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
