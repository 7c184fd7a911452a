import { conformance } from '../conformance/kit.ts';

conformance('deflate');
conformance('deflate:level=1', { alphabetSizes: [256], runs: 8 });
conformance('deflate-huffman');
conformance('deflate-preset');
// The best quality is many times slower; what surrounds the library is the same at every quality.
conformance('brotli:quality=4');
conformance('brotli', { alphabetSizes: [256, 65536], runs: 3 });
// Four bytes a symbol.
conformance('deflate', { alphabetSizes: [65537, 2 ** 32], runs: 10 });
