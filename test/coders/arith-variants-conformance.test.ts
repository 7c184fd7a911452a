import { conformance } from '../conformance/kit.ts';

conformance('arith:order=1,backoff=none,range=32', { runs: 2, alphabetSizes: [1, 2, 256] });
conformance('arith:order=3,backoff=none,counts=add:1/20,halve_at=300', {
  runs: 2,
  alphabetSizes: [3],
});
conformance('arith:order=4,halve_at=1000,range=32,unseen=add:1/2', {
  runs: 2,
  alphabetSizes: [2, 256],
});
conformance('arith:order=1,total_bits=22,unseen=add:3', { runs: 2, alphabetSizes: [65536] });
