import { conformance } from '../conformance/kit.ts';

conformance('rice', { runs: 8 });
conformance('rice:k=0', { alphabetSizes: [1, 2, 3, 256], runs: 8 });
conformance('rice:k=11', { alphabetSizes: [2, 256, 65536], runs: 8 });
conformance('rice:k=24', { alphabetSizes: [1, 256], runs: 5 });
