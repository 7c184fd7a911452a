import { conformance } from '../conformance/kit.ts';

conformance('rice:stored=on', { runs: 4 });
conformance('huffman:stored=on', { alphabetSizes: [1, 3, 256, 65536], runs: 3 });
conformance('arith:order=1,stored=on', { alphabetSizes: [1, 2, 256], runs: 3 });
conformance('block-huffman:n=2,stored=on', { alphabetSizes: [2, 256], runs: 3 });
conformance('rice:stored=on,after=delta.zigzag', { alphabetSizes: [3, 256, 65536], runs: 3 });
conformance('arith:order=0,stored=on,after=byte-planes', { alphabetSizes: [257, 65536], runs: 3 });
conformance('deflate:stored=on', { alphabetSizes: [2, 256, 65536], runs: 3 });
