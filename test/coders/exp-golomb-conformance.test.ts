import { conformance } from '../conformance/kit.ts';

conformance('exp-golomb', { runs: 8 });
conformance('exp-golomb:k=0', { runs: 8 });
conformance('exp-golomb:k=5', { alphabetSizes: [2, 256, 65536], runs: 8 });
conformance('exp-golomb:k=24', { alphabetSizes: [1, 256], runs: 5 });
