import type { Baseline, BaselineCell } from './baseline.ts';

/** Why a cell has nothing to be held against. */
export interface Unpaired {
  readonly id: string;
  readonly found: 'baseline' | 'run' | 'both';
  readonly reason: string;
}

/** A cell of both. */
export interface PairedCell {
  readonly id: string;
  readonly was: BaselineCell;
  readonly now: BaselineCell;
  /** The corpus has other files, but each file is coded by itself, so that files of the same content can be compared. */
  readonly filesOnly: boolean;
}

const FRAMING = ['symbols_as', 'messages_as', 'lengths', 'folds', 'sample'] as const;

/** Nothing that was learnt from one file reaches another. */
function filesAreApart({ tables, reset }: BaselineCell): boolean {
  return tables !== 'shipped' && tables !== 'primed' && (reset === 'message' || reset === 'file');
}

/** A value by its key, never one that all objects inherit. */
export function own<T>(values: Readonly<Record<string, T>>, key: string): T | undefined {
  return Object.hasOwn(values, key) ? values[key] : undefined;
}

function changed(key: string, was: unknown, now: unknown): string {
  return `${key.replace('_as', '')} ${now ?? 'none'}, was ${was ?? 'none'}`;
}

/** Files of both cells that hold the same content and as many coded symbols. */
export function sharedFiles(
  was: BaselineCell,
  now: BaselineCell,
): { readonly file: string; readonly was: number; readonly now: number }[] {
  return Object.entries(was.files ?? {}).flatMap(([file, before]) => {
    const after = own(now.files ?? {}, file);
    if (after === undefined || after.symbols !== before.symbols) return [];
    return [{ file, was: before.bytes * 8, now: after.bytes * 8 }];
  });
}

/** In words why the bits of two cells of one name cannot be compared; undefined where they can. */
function whyNot(baseline: Baseline, run: Baseline, was: BaselineCell, now: BaselineCell) {
  const before = own(baseline.corpora, was.corpus);
  const after = own(run.corpora, now.corpus);
  if (before === undefined || after === undefined) return `the corpus ${was.corpus} is not listed`;
  for (const key of FRAMING) {
    if (before[key] !== after[key]) return changed(key, before[key], after[key]);
  }
  if (was.align !== now.align) return changed('align', was.align, now.align);
  if (baseline.plan.split !== run.plan.split)
    return changed('split', baseline.plan.split, run.plan.split);
  return undefined;
}

/**
 * Pairs the cells of a baseline and a run by id, where both code the same data in the same framing.
 * A cell of both that failed in either is paired: what it fails by is its own verdict.
 */
export function pairCells(
  baseline: Baseline,
  run: Baseline,
): { pairs: PairedCell[]; unpaired: Unpaired[] } {
  const pairs: PairedCell[] = [];
  const unpaired: Unpaired[] = [];
  for (const [id, was] of Object.entries(baseline.cells)) {
    const now = own(run.cells, id);
    if (now === undefined) {
      unpaired.push({ id, found: 'baseline', reason: 'not in this run' });
      continue;
    }
    const reason = whyNot(baseline, run, was, now);
    if (reason !== undefined) {
      unpaired.push({ id, found: 'both', reason });
      continue;
    }
    const same = baseline.corpora[was.corpus].sha256 === run.corpora[now.corpus].sha256;
    const bothVerified = was.verified && now.verified;
    if (same && bothVerified && was.symbol_count !== now.symbol_count) {
      const reason = changed('symbols coded', was.symbol_count, now.symbol_count);
      unpaired.push({ id, found: 'both', reason });
    } else if (same || !bothVerified) {
      pairs.push({ id, was, now, filesOnly: false });
    } else if (filesAreApart(now) && sharedFiles(was, now).length > 0) {
      pairs.push({ id, was, now, filesOnly: true });
    } else {
      unpaired.push({ id, found: 'both', reason: `the files of ${was.corpus} changed` });
    }
  }
  for (const id of Object.keys(run.cells)) {
    if (own(baseline.cells, id) === undefined)
      unpaired.push({ id, found: 'run', reason: 'not in the baseline' });
  }
  return { pairs, unpaired };
}
