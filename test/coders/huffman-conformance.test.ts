import { conformance } from '../conformance/kit.ts';

conformance('huffman');
conformance('huffman:maxbits=16,unseen=add:1/256', { runs: 10 });
conformance('huffman:maxbits=8', { alphabetSizes: [1, 2, 256], runs: 10 });
