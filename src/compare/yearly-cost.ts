import type { CellRecord } from '../harness/run-record.ts';

/** What sending costs, as a plan writes it. */
export interface CostTerms {
  /** For 1 000 000 bytes. */
  readonly price_per_megabyte?: number | undefined;
  readonly currency?: string | undefined;
  readonly bill_step_bytes?: number | undefined;
  /** Units, or messages where nothing is filled, that one device sends. */
  readonly units_per_day?: number | undefined;
  readonly devices?: number | undefined;
}

/** A year of all devices. */
export interface YearlyCost {
  readonly bytes: number;
  /** In the plan's currency. */
  readonly cost: number;
}

const DAYS_A_YEAR = 365;
const BYTES_A_MEGABYTE = 1e6;

/** Bytes that a link bills for one unit, or message. */
function billedBytesPerUnit(cell: CellRecord): number | undefined {
  if (cell.billing !== undefined) return cell.billing.steps_per_unit * cell.billing.step_bytes;
  const units = cell.unit_count ?? cell.message_count;
  return units === undefined || units === 0 ? undefined : (cell.carried_bits ?? 0) / 8 / units;
}

/** Undefined where the plan does not say enough, or the cell has no rate. */
export function yearlyCost(cell: CellRecord, terms: CostTerms): YearlyCost | undefined {
  const { price_per_megabyte: price, units_per_day: units, devices = 1 } = terms;
  const perUnit = billedBytesPerUnit(cell);
  if (price === undefined || units === undefined || perUnit === undefined) return undefined;
  const bytes = perUnit * units * devices * DAYS_A_YEAR;
  return { bytes, cost: (bytes / BYTES_A_MEGABYTE) * price };
}

/** A choice between two cells of which one costs less to send and more on the device. */
export interface BreakEven {
  /** Ids: the one that sends less, and the one that takes less memory. */
  readonly cheaper: string;
  readonly smaller: string;
  readonly extraFlashBytes: number;
  readonly extraRamBytes: number;
  /** Saved in a year by one device, in the plan's currency: what its extra memory may cost a year. */
  readonly savedPerDeviceYear: number;
}

/** A cell as far as its break-even against others goes. */
export interface PricedCell {
  readonly id: string;
  readonly cost: number;
  readonly flashBytes: number;
  readonly ramBytes: number;
}

/** For every pair in which the cheaper to send takes more flash or RAM: what that memory may cost. Cheapest first. */
export function breakEvens(cells: readonly PricedCell[], devices: number): BreakEven[] {
  const byCost = cells.toSorted((a, b) => a.cost - b.cost || (a.id < b.id ? -1 : 1));
  return byCost.flatMap((cheaper, i) =>
    byCost.slice(i + 1).flatMap((smaller) => {
      const extraFlashBytes = cheaper.flashBytes - smaller.flashBytes;
      const extraRamBytes = cheaper.ramBytes - smaller.ramBytes;
      if (cheaper.cost === smaller.cost || (extraFlashBytes <= 0 && extraRamBytes <= 0)) return [];
      return [
        {
          cheaper: cheaper.id,
          smaller: smaller.id,
          extraFlashBytes,
          extraRamBytes,
          savedPerDeviceYear: (smaller.cost - cheaper.cost) / devices,
        },
      ];
    }),
  );
}
