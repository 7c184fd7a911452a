import { parseRecordField } from '../../src/symbols/record.ts';
import { conformance } from '../conformance/kit.ts';

const fields = ([name, text]: [string, string]) => parseRecordField(name, text, 13);

/**
 * Every kind of field, gaps of bytes and of bits, and both byte orders; 13 bytes fit no round
 * length.
 */
const record = {
  bytes: 13,
  fields: (
    [
      ['wide', 's32le@9'],
      ['a', 'u16le@0'],
      ['b', 's16be@2'],
      ['c', 'u3@4.1'],
      ['d', 'u4@4.6'],
      ['e', 's24be@6'],
    ] as [string, string][]
  ).map(fields),
};

const map = {
  a: 'delta/last',
  b: 'delta2/field:a',
  c: 'xor/value',
  d: 'raw/value',
  e: 'delta/value',
  wide: 'delta2/last',
};

conformance('fields:auto', { alphabetSizes: [256], runs: 8, setup: { record } });
conformance('fields:range=32', { alphabetSizes: [256], runs: 8, setup: { record, fields: map } });
conformance('fields:auto,stored=on', { alphabetSizes: [256], runs: 3, setup: { record } });
conformance('fields:map=@0:delta/last', {
  alphabetSizes: [256],
  runs: 8,
  setup: { record: { bytes: 1, fields: [] } },
});
