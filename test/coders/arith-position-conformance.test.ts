import { conformance } from '../conformance/kit.ts';

conformance('arith:order=0,position=3', { runs: 1, alphabetSizes: [1, 2, 256] });
conformance('arith:order=1,position=24', { runs: 1, alphabetSizes: [2, 256] });
conformance('arith:order=2,position=3', { runs: 1, alphabetSizes: [2, 256] });
conformance('arith:order=0,position=24,backoff=none', { runs: 1, alphabetSizes: [256] });
conformance('arith:order=1,position=24,unseen=add:1/2', { runs: 1, alphabetSizes: [65536] });
conformance('arith:order=1,position=3,stored=on,after=delta', { runs: 1, alphabetSizes: [256] });
conformance('arith:order=0,position=3,tables_in_set=2', { runs: 1, alphabetSizes: [256] });
