import { conformance } from '../conformance/kit.ts';

conformance('arith:order=0', { runs: 8 });
conformance('arith:order=2', { runs: 6 });
