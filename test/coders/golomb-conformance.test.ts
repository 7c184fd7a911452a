import { conformance } from '../conformance/kit.ts';

conformance('golomb', { runs: 8 });
conformance('golomb:m=1', { alphabetSizes: [1, 2, 3, 256], runs: 8 });
conformance('golomb:m=3', { alphabetSizes: [1, 3, 256], runs: 8 });
conformance('golomb:m=1000', { alphabetSizes: [2, 256, 65536], runs: 8 });
conformance('golomb:m=1048576', { alphabetSizes: [1, 256], runs: 5 });
