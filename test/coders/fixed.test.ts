import { conformance } from '../conformance/kit.ts';

conformance('fixed');
