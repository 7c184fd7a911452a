import { conformance } from '../conformance/kit.ts';

conformance('huffman:after=delta.zigzag', { runs: 4 });
conformance('arith:order=1,after=lag24', { alphabetSizes: [1, 256, 65536], runs: 3 });
conformance('rice:after=delta2.zigzag', { alphabetSizes: [3, 256, 65536], runs: 3 });
conformance('huffman:after=byte-planes.xor3', { alphabetSizes: [257, 2 ** 32], runs: 3 });
conformance('arith:order=2,after=bit-planes', { alphabetSizes: [3, 256], runs: 3 });
conformance('deflate:after=xor', { alphabetSizes: [1, 2, 256], runs: 3 });
