import { parseRecordField } from '../../src/symbols/record.ts';
import { conformance } from '../conformance/kit.ts';

conformance('huffman:tables_in_set=1', { alphabetSizes: [1, 3, 256], runs: 3 });
conformance('huffman:tables_in_set=2', { alphabetSizes: [1, 3, 256, 65536], runs: 3 });
conformance('huffman:tables_in_set=5', { alphabetSizes: [2, 256], runs: 3 });
conformance('arith:order=0,tables_in_set=1', { alphabetSizes: [1, 256], runs: 3 });
conformance('arith:order=1,tables_in_set=2', { alphabetSizes: [1, 2, 256], runs: 3 });
conformance('arith:order=0,tables_in_set=5', { alphabetSizes: [3, 256], runs: 3 });
conformance('block-huffman:n=2,tables_in_set=3', { alphabetSizes: [2, 256], runs: 3 });
conformance('rice:tables_in_set=3,stored=on', { alphabetSizes: [1, 3, 256, 65536], runs: 3 });
conformance('arith:order=0,tables_in_set=2,stored=on,after=byte-planes', {
  alphabetSizes: [257, 65536],
  runs: 3,
});
conformance('huffman:tables_in_set=3,after=delta.zigzag', { alphabetSizes: [1, 256], runs: 3 });
conformance('deflate-preset:tables_in_set=2', { alphabetSizes: [2, 256], runs: 2 });
conformance('fields:auto,tables_in_set=2', {
  alphabetSizes: [256],
  runs: 3,
  setup: {
    record: {
      bytes: 3,
      fields: [parseRecordField('a', 'u8@0', 3), parseRecordField('b', 'u16le@1', 3)],
    },
  },
});
