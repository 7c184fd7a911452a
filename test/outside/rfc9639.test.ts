/**
 * RFC 9639 (FLAC), M. Q. C. van Beurden, A. Weaver, 2024: section 9.2.7, coded residual, on the streams of its Appendix D. The
 * residuals and bits were taken out of the specification authors' streams by a reader written for it; the samples of example
 * 3 have the MD5 that its stream's header carries.
 */
import { createHash } from 'node:crypto';
import { describe, expect, it } from 'vitest';
import { riceFamily } from '../../src/coders/rice.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';
import { parseTransformChain } from '../../src/transforms/chain.ts';
import { zigzag } from '../../src/transforms/zigzag.ts';
import { bitsOf, symbolsOf } from './integer-words.ts';
import vectors from './vectors/rfc9639-rice.json' with { type: 'json' };

const M = 65_536;
const residueOf = (value: number) => ((value % M) + M) % M;
const signedOf = (residue: number) => (residue < M / 2 ? residue : residue - M);

function fold(values: readonly number[]): number[] {
  const symbols = Uint16Array.from(values, residueOf);
  return [...zigzag.forward(M, false).push(oneMessage(symbols, M)).symbols];
}

function unfold(folded: readonly number[]): number[] {
  const symbols = Uint16Array.from(folded);
  return [...zigzag.inverse(M, false).push(oneMessage(symbols, M)).symbols].map(signedOf);
}

const subframes = vectors.cases.flatMap((example) =>
  example.subframes.map((subframe, i) => ({
    title: `${example.stream}, subframe ${i}`,
    example,
    subframe,
  })),
);

/** Residuals of a subframe: those in Rice words decoded from their bits, those in an escaped partition as given. */
function residualsOf({ partitions }: (typeof subframes)[number]['subframe']): number[] {
  return partitions.flatMap((partition) => {
    if (!('coded_bits' in partition)) return partition.values;
    const { coded_bits, rice_parameter, values } = partition;
    return unfold(symbolsOf(riceFamily, coded_bits!, values.length, rice_parameter!));
  });
}

describe('RFC 9639 section 9.2.7', () => {
  for (const { title, subframe } of subframes) {
    it(`${title}: residuals from the coded bits, and back`, () => {
      expect(residualsOf(subframe)).toEqual(subframe.partitions.flatMap(({ values }) => values));
      for (const { coded_bits, bit_count, rice_parameter, values } of subframe.partitions) {
        if (coded_bits === undefined) continue;
        expect(coded_bits.length).toBe(bit_count);
        expect(bitsOf(riceFamily, fold(values), rice_parameter!)).toBe(coded_bits);
      }
    });
  }

  it.each(subframes.filter(({ subframe }) => subframe.type === 'fixed'))(
    '$title: a fixed predictor of order 1 is delta.zigzag',
    ({ subframe }) => {
      expect(subframe.order).toBe(1);
      const chain = parseTransformChain('delta.zigzag');
      const coded = fold([...subframe.warm_up, ...residualsOf(subframe)]);
      const back = chain.inverse(M, false).push(oneMessage(Uint16Array.from(coded), M));
      expect([...back.symbols].map(signedOf)).toEqual(subframe.samples);
      const samples = Uint16Array.from(subframe.samples, residueOf);
      expect([...chain.forward(M, false).push(oneMessage(samples, M)).symbols]).toEqual(coded);
    },
  );

  it.each(subframes.filter(({ subframe }) => subframe.type === 'lpc'))(
    '$title: the residuals lead to samples with the MD5 of the header',
    ({ subframe, example }) => {
      const samples = [...subframe.warm_up];
      for (const residual of residualsOf(subframe)) {
        let prediction = 0;
        for (const [i, coefficient] of subframe.coefficients.entries())
          prediction += coefficient * samples[samples.length - 1 - i];
        samples.push((prediction >> subframe.shift) + residual);
      }
      expect(samples).toEqual(subframe.samples);
      const bytes = Int8Array.from(samples);
      expect(createHash('md5').update(bytes).digest('hex')).toBe(example.md5_of_samples);
    },
  );
});
