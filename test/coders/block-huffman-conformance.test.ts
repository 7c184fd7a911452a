import { conformance } from '../conformance/kit.ts';

conformance('block-huffman:n=1', { alphabetSizes: [1, 2, 256], runs: 8 });
conformance('block-huffman:n=2', { runs: 10 });
conformance('block-huffman:n=3,maxbits=20', { runs: 8 });
conformance('block-huffman:n=4', { alphabetSizes: [1, 2, 3, 256, 8192], runs: 8 });
