import { conformance } from '../conformance/kit.ts';

conformance('arith:order=0', { runs: 2 });
conformance('arith:order=2', { runs: 2, alphabetSizes: [2, 256] });
