import type { CellRecord } from './run-record.ts';
import type { CellTimes, EndTimes, PacedTime } from './time-cell.ts';

/** What a run record keeps of the times of a cell. */
export function timesRecordOf(
  times: CellTimes,
): Required<Pick<CellRecord, 'encode' | 'decode' | 'timed'>> & Pick<CellRecord, 'table_build'> {
  const { pacer, symbolCount, messageCount, encode, decode, buildTables } = times;
  return {
    timed: { pacer, symbol_count: symbolCount, message_count: messageCount },
    encode: endRecord(encode),
    decode: endRecord(decode),
    ...(buildTables === undefined ? {} : { table_build: pacedRecord(buildTables) }),
  };
}

function endRecord(times: EndTimes): NonNullable<CellRecord['encode']> {
  const { setUp, perMessage, pacerSeconds, seconds, unsteady, ...figures } = times;
  return {
    ...figures,
    seconds: [...seconds],
    pacer_seconds: [...pacerSeconds],
    ...(unsteady ? { unsteady } : {}),
    ...(setUp === undefined ? {} : { set_up: pacedRecord(setUp) }),
    ...(perMessage === undefined ? {} : { per_message: pacedRecord(perMessage) }),
  };
}

function pacedRecord(time: PacedTime): NonNullable<CellRecord['table_build']> {
  const { seconds, pacerSymbols, low, high } = time;
  return { seconds, pacer_symbols: pacerSymbols, low, high };
}
