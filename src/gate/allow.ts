import type { PlanFile } from '../corpus/plan-schema.ts';
import { InputError } from '../errors/errors.ts';

/** By how much bits may grow: a number of bits, or a percentage of what they were, as in `0.5%`. */
export type Growth = number | string;

/** What a gate lets pass. */
export interface Allow {
  /** Of the carried bits of a cell. */
  readonly total: Growth;
  /** Of each file of a cell. */
  readonly each_file: Growth;
}

const PERCENTAGE = /^(\d+)(?:\.(\d+))?%$/;

/** What the plan of a record allows; nothing where it says nothing. */
export function allowOf(gate: PlanFile['gate']): Allow {
  return { total: gate?.allow.total ?? 0, each_file: gate?.allow.each_file ?? 0 };
}

/**
 * Whether bits that grew from `was` to `now` stay within what is allowed. Exact: a percentage is compared in whole numbers.
 * @param was  bits, a whole number
 * @param now  bits, a whole number
 */
export function isWithin(was: number, now: number, allowed: Growth): boolean {
  if (now <= was) return true;
  if (typeof allowed === 'number') return now - was <= allowed;
  const [, whole, decimals = ''] = PERCENTAGE.exec(allowed)!;
  const share = BigInt(whole + decimals);
  return BigInt(now - was) * 100n * 10n ** BigInt(decimals.length) <= share * BigInt(was);
}

function growthOf(text: string, given: string): Growth {
  if (PERCENTAGE.test(text)) return text;
  if (/^\d+(\.\d+)?$/.test(text)) return Number(text);
  throw new InputError('--allow does not say by how much bits may grow', {
    expected: 'bits or a percentage for both, or as in total=0,each_file=0.5%',
    got: given,
  });
}

/**
 * Reads `--allow`: one growth for both, or `total=…`, `each_file=…` or both, parted by a comma.
 * @param plan  what counts for a key that is not named
 * @throws InputError
 */
export function parseAllow(text: string, plan: Allow): Allow {
  if (!text.includes('=')) {
    const both = growthOf(text, text);
    return { total: both, each_file: both };
  }
  const allow: { -readonly [K in keyof Allow]: Allow[K] } = { ...plan };
  for (const part of text.split(',')) {
    const [key, value = ''] = part.split(/=(.*)/s);
    if (key !== 'total' && key !== 'each_file') {
      throw new InputError('--allow has no such key', {
        expected: 'total or each_file',
        got: key,
      });
    }
    allow[key] = growthOf(value, text);
  }
  return allow;
}

/** A growth as it is said: `8 bits`, `0.5 %`, `nothing`. */
export function growthText(growth: Growth): string {
  if (typeof growth === 'string') return growth.replace('%', ' %');
  return growth === 0 ? 'nothing' : `${growth} ${growth === 1 ? 'bit' : 'bits'}`;
}
