import { ACCOUNT_LINES, type AccountLine } from '../account/bit-account.ts';
import type { BaselineCell } from './baseline.ts';

/** A line of the account that changed. */
export interface LineGrowth {
  readonly line: AccountLine;
  /** Bits. */
  readonly was: number;
  readonly now: number;
  /** What it is paid for, and how many of them there are now and were; absent where a mean says nothing. */
  readonly per?: { readonly unit: 'table' | 'message'; readonly was: number; readonly now: number };
}

type Account = NonNullable<BaselineCell['account']>;

/** The account with structure and learning in one where the other account does not part them. */
function asSplitAs(account: Account, other: Account): Account {
  if (account.model !== undefined || other.model === undefined) return account;
  const { structure, learning, ...rest } = account;
  if (structure === undefined && learning === undefined) return account;
  return { ...rest, model: (structure ?? 0) + (learning ?? 0) };
}

/** How many table sets a cell sends. */
function tablesSent({ reset, message_count = 0, files = {} }: BaselineCell): number {
  if (reset === 'message') return message_count;
  if (reset === 'file') return Object.keys(files).length;
  const every = /^message\*(\d+)$/.exec(reset)?.[1];
  return every === undefined ? 1 : Math.ceil(message_count / Number(every));
}

function unitOf(line: AccountLine, cell: BaselineCell): 'table' | 'message' | undefined {
  if (line === 'tables') return cell.tables === 'sent' ? 'table' : undefined;
  return ['index', 'framing', 'ends', 'check'].includes(line) ? 'message' : undefined;
}

/**
 * The lines of the account that changed, floor apart, the most grown first. The floor is an estimate: where it moved, the
 * lines above it move against it, and only the sum of all is exact.
 */
export function accountGrowth(was: BaselineCell, now: BaselineCell): LineGrowth[] {
  if (was.account === undefined || now.account === undefined) return [];
  const before = asSplitAs(was.account, now.account);
  const after = asSplitAs(now.account, was.account);
  return ACCOUNT_LINES.filter((line) => line !== 'floor')
    .flatMap((line): LineGrowth[] => {
      const [a, b] = [before[line] ?? 0, after[line] ?? 0];
      // Lines are kept to a thousandth of a bit.
      if (Math.abs(b - a) < 0.0015) return [];
      const unit = unitOf(line, now);
      const count = (cell: BaselineCell) =>
        unit === 'table' ? tablesSent(cell) : (cell.message_count ?? 0);
      const [counted, counts] = [count(was), count(now)];
      return [
        {
          line,
          was: a,
          now: b,
          ...(unit === undefined || counted === 0 || counts === 0
            ? {}
            : { per: { unit, was: a / counted, now: b / counts } }),
        },
      ];
    })
    .sort((a, b) => b.now - b.was - (a.now - a.was));
}
