/**
 * R. Peon, H. Ruellan, RFC 7541 (2015). Appendix B: a canonical code of 257 words up to 30 bits,
 * complete. Appendix C.4 and C.6: strings coded with it, filled up with ones.
 */
import { describe, expect, it } from 'vitest';
import { BitReader } from '../../src/bits/bit-reader.ts';
import { BitWriter } from '../../src/bits/bit-writer.ts';
import { canonicalCodes, LengthTally } from '../../src/stages/prefix-code.ts';
import { PrefixDecoder } from '../../src/stages/prefix-decoder.ts';
import { PrefixEncoder } from '../../src/stages/prefix-encoder.ts';
import vectors from './vectors/rfc7541-huffman.json' with { type: 'json' };

const lengths = Uint8Array.from(vectors.cases.find((c) => c.kind === 'lengths')!.lengths!);
const symbols = Uint32Array.from(lengths.keys());
const strings = vectors.cases.filter((c) => c.kind === 'string');

describe('RFC 7541', () => {
  it('Appendix B: Kraft’s sum is exactly 1', () => {
    expect(lengths.length).toBe(257);
    const tally = new LengthTally();
    tally.take(lengths, 257);
    expect(tally.complete).toBe(true);
    expect(lengths.reduce((sum, length) => sum + 2 ** (30 - length), 0)).toBe(2 ** 30);
  });

  it('Appendix B: all 257 words', () => {
    const published = vectors.cases.find((c) => c.kind === 'codes_hex')!.codes!;
    expect(Array.from(canonicalCodes(lengths), (code) => code.toString(16))).toEqual(published);
  });

  it.each(strings.map((c) => [c.where, c.text, c.hex, c.bits]))(
    'Appendix %s: %s',
    (_, text, hex, bits) => {
      const encoder = new PrefixEncoder(257);
      encoder.setWords(symbols, lengths, 257);
      const writer = new BitWriter();
      const characters = Uint16Array.from(Buffer.from(text!, 'latin1'));
      expect(encoder.encode(writer, characters, 0, characters.length)).toBe(bits);
      writer.writeRun(1, (8 - (writer.position % 8)) % 8);
      const { bytes } = writer.finish();
      expect(Buffer.from(bytes).toString('hex')).toBe(hex);

      const decoder = new PrefixDecoder(257);
      decoder.setWords(symbols, lengths, 257, characters.length);
      const reader = new BitReader(Buffer.from(hex!, 'hex'));
      const back = new Uint16Array(characters.length);
      decoder.decode(reader, back, 0, back.length);
      expect(back).toEqual(characters);
      expect(reader.position).toBe(bits);
    },
  );
});
