import { brotliDecompressSync, deflateRawSync, inflateRawSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { CodedInput, Lengths, Setup } from '../../src/coders/contract.ts';
import type { PresetTables } from '../../src/coders/deflate-preset.ts';
import {
  CorruptStreamError,
  InputError,
  LimitError,
  PromiseError,
} from '../../src/errors/errors.ts';
import { oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';
import { decode, encode, inputOf, train, unitOf } from '../conformance/cells.ts';
import { integers } from '../conformance/sequences.ts';

const REFERENCES = ['deflate', 'deflate-huffman', 'deflate-preset', 'brotli'];

function setupOf(changes: Partial<Setup> = {}): Setup {
  const base = { policy: 'none', alphabetSize: 256, reset: 'message', lengths: 'sent', align: 8 };
  return { ...base, ...changes } as Setup;
}

const text = Buffer.from('set point -18.0, supply -18.3, return -17.1; '.repeat(40));

/** The candidate's own bytes for one message. */
function coded(candidate: string, setup: Setup, sequence: SymbolSequence): Uint8Array {
  return encode(parseCandidate(candidate).create(), setup, [sequence]).bytes;
}

function decodeBytes(
  candidate: string,
  setup: Setup,
  input: Partial<CodedInput> & { bytes: Uint8Array },
  maxSymbols = 1e6,
) {
  const coder = parseCandidate(candidate).create();
  return decode(coder, setup, { messageCount: 1, ...input }, maxSymbols).sequence.symbols;
}

describe('references', () => {
  it('say that they are for scale and give no price', () => {
    for (const name of REFERENCES) {
      const coder = parseCandidate(name).create();
      expect(coder.declares.reference).toBe(true);
      expect(coder.declares.resets).toEqual(['message']);
      expect(coder.price).toBeUndefined();
    }
  });

  it('write streams that the library reads by itself', () => {
    const message = oneMessage(text, 256);
    expect(inflateRawSync(coded('deflate', setupOf(), message))).toEqual(text);
    expect(inflateRawSync(coded('deflate:level=1', setupOf(), message))).toEqual(text);
    expect(inflateRawSync(coded('deflate-huffman', setupOf(), message))).toEqual(text);
    expect(brotliDecompressSync(coded('brotli', setupOf(), message))).toEqual(text);
    expect(brotliDecompressSync(coded('brotli:quality=0', setupOf(), message))).toEqual(text);
  });

  it('search as hard as they are told', () => {
    const next = integers(5);
    const noisy = Uint8Array.from(
      { length: 30_000 },
      (_, i) => text[(i * (1 + (next() & 1))) % 97],
    );
    const sizeOf = (candidate: string) =>
      coded(candidate, setupOf(), oneMessage(noisy, 256)).length;
    expect(sizeOf('deflate')).toBeLessThan(sizeOf('deflate:level=1'));
    expect(sizeOf('brotli')).toBeLessThan(sizeOf('brotli:quality=0'));
    expect(sizeOf('deflate')).toBeLessThan(sizeOf('deflate-huffman'));
  });

  it('see wide symbols as little-endian bytes', () => {
    const two = oneMessage(Uint16Array.of(0x0102, 0xfffe, 7), 65536);
    const asTwo = inflateRawSync(coded('deflate', setupOf({ alphabetSize: 65536 }), two));
    expect([...asTwo]).toEqual([2, 1, 0xfe, 0xff, 7, 0]);
    const four = oneMessage(Uint32Array.of(0x01020304, 0xfffefdfc), 2 ** 32);
    const asFour = inflateRawSync(coded('deflate', setupOf({ alphabetSize: 2 ** 32 }), four));
    expect([...asFour]).toEqual([4, 3, 2, 1, 0xfc, 0xfd, 0xfe, 0xff]);
  });

  it('carry nothing for an empty message that the framing shows, else a stream of nothing', () => {
    const empty = oneMessage(new Uint8Array(0), 256);
    for (const name of ['deflate', 'deflate-huffman', 'brotli']) {
      for (const lengths of ['known', 'link'] as const) {
        expect(coded(name, setupOf({ lengths }), empty).length).toBe(0);
      }
    }
    // RFC 1951 §3.2.3 and §3.2.6: final block 1, fixed codes 01, end of block 0000000, least significant bit first.
    expect([...coded('deflate', setupOf(), empty)]).toEqual([0b011, 0]);
    expect(brotliDecompressSync(coded('brotli', setupOf(), empty)).length).toBe(0);
  });

  it('book the whole stream as written and nothing as framing', () => {
    const { account, payloadBits } = encode(
      parseCandidate('deflate').create(),
      setupOf({ align: 64 }),
      [oneMessage(text, 256)],
    );
    const streamBits = 8 * deflateRawSync(text, { level: 9 }).length;
    expect(payloadBits).toBe(streamBits);
    expect(account).toEqual({
      writtenBits: streamBits,
      endingBits: 0,
      paddingBits: (64 - (streamBits % 64)) % 64,
      tableBits: 0,
      indexBits: 0,
      framingBits: 0,
      checkBits: 0,
    });
  });

  it('refuse setups in which they would remember earlier messages', () => {
    for (const name of REFERENCES) {
      const coder = parseCandidate(name).create();
      expect(() => coder.check!(setupOf({ policy: 'learned' }))).toThrow(InputError);
      const [policy] = coder.declares.policies;
      expect(() => coder.check!(setupOf({ policy, reset: 'never' }))).toThrow(InputError);
      expect(() => coder.check!(setupOf({ policy }))).not.toThrow();
    }
  });
});

describe('deflate decoding', () => {
  /** A stored block, RFC 1951 §3.2.4: final 1, type 00, length and its complement, the bytes. */
  const stored = (...bytes: number[]) =>
    Uint8Array.of(1, bytes.length, 0, 0xff - bytes.length, 0xff, ...bytes);

  it('reads a block that was put together by hand', () => {
    expect([...decodeBytes('deflate', setupOf(), { bytes: stored(104, 105) })]).toEqual([104, 105]);
  });

  it('refuses symbols outside the alphabet, and parts of symbols', () => {
    const setup = setupOf({ alphabetSize: 105 });
    expect([...decodeBytes('deflate', setup, { bytes: stored(104) })]).toEqual([104]);
    expect(() => decodeBytes('deflate', setup, { bytes: stored(105) })).toThrow(CorruptStreamError);
    const wide = setupOf({ alphabetSize: 300 });
    expect([...decodeBytes('deflate', wide, { bytes: stored(43, 1) })]).toEqual([299]);
    expect(() => decodeBytes('deflate', wide, { bytes: stored(44, 1) })).toThrow(
      CorruptStreamError,
    );
    expect(() => decodeBytes('deflate', wide, { bytes: stored(1, 1, 1) })).toThrow(
      CorruptStreamError,
    );
  });

  it('refuses what lies between a stream and its granted end, zeros of padding apart', () => {
    const bytes = new Uint8Array(16);
    bytes.set(stored(1, 2, 3));
    const input = { bytes, messageEndsBits: Float64Array.of(64) };
    const link = setupOf({ lengths: 'link' });
    expect(decodeBytes('deflate', link, input).length).toBe(3);
    expect(() =>
      decodeBytes('deflate', link, { ...input, messageEndsBits: Float64Array.of(72) }),
    ).toThrow(/does not end where its bits end/);
    const aligned = setupOf({ lengths: 'link', align: 32 });
    expect(decodeBytes('deflate', aligned, input).length).toBe(3);
    const padded = stored(1, 2);
    expect(padded.length).toBe(7);
    const dirty = Uint8Array.of(...padded, 1);
    expect(() =>
      decodeBytes('deflate', aligned, { bytes: dirty, messageEndsBits: Float64Array.of(64) }),
    ).toThrow(/padding of a message is not zeros/);
  });

  it('refuses a stream of nothing where an empty message has no bytes', () => {
    const bytes = Uint8Array.of(3, 0);
    expect(decodeBytes('deflate', setupOf(), { bytes }).length).toBe(0);
    expect(() =>
      decodeBytes('deflate', setupOf({ lengths: 'link' }), {
        bytes,
        messageEndsBits: Float64Array.of(16),
      }),
    ).toThrow(CorruptStreamError);
  });

  it.each(['deflate', 'brotli'])(
    '%s: a small stream of a large content stops at the limit',
    (name) => {
      const zeros = oneMessage(new Uint8Array(5_000_000), 256);
      for (const lengths of ['known', 'link', 'sent'] satisfies Lengths[]) {
        const coder = parseCandidate(name).create();
        const setup = setupOf({ lengths });
        const input = inputOf(setup, encode(coder, setup, [zeros]), zeros);
        expect(input.bytes.length).toBeLessThan(10_000);
        expect(() => decode(coder, setup, input, 4_999_999)).toThrow(LimitError);
      }
      const known = setupOf({ lengths: 'known' });
      const bytes = coded(name, known, zeros);
      const symbolCounts = Uint32Array.of(4_999_999);
      expect(() => decodeBytes(name, known, { bytes, symbolCounts }, 1e7)).toThrow(
        CorruptStreamError,
      );
    },
  );

  it('reports the place of a cut stream', () => {
    const setup = setupOf();
    const bytes = coded('deflate', setup, oneMessage(text, 256));
    expect(() => decodeBytes('deflate', setup, { bytes: bytes.slice(0, -1) })).toThrow(
      /no whole deflate stream/,
    );
  });
});

describe('deflate-preset', () => {
  const coder = parseCandidate('deflate-preset').create();
  const setup = setupOf({ policy: 'shipped' });
  const next = integers(77);
  const noise = Uint8Array.from({ length: 50_000 }, () => next() & 0xff);

  it('keeps the last 32 KiB of the train split, however it is cut', () => {
    const whole = train(coder, setup, [oneMessage(noise, 256)]) as PresetTables;
    expect(Buffer.from(whole.dictionary)).toEqual(Buffer.from(noise.subarray(50_000 - 32_768)));
    const chunks = [];
    for (let at = 0; at < noise.length; at += 7001) {
      chunks.push(oneMessage(noise.subarray(at, at + 7001), 256));
    }
    expect(train(coder, setup, chunks)).toEqual(whole);
    const short = train(coder, setup, [oneMessage(noise.subarray(0, 100), 256)]) as PresetTables;
    expect([...short.dictionary]).toEqual([...noise.subarray(0, 100)]);
  });

  it('keeps the newest whole symbols of a wide alphabet', () => {
    const wide = Uint16Array.from({ length: 20_000 }, () => next() & 0xffff);
    const tables = train(coder, setupOf({ policy: 'shipped', alphabetSize: 65536 }), [
      oneMessage(wide, 65536),
    ]) as PresetTables;
    expect(tables.dictionary.length).toBe(32_768);
    const last = tables.dictionary.subarray(-2);
    expect(last[0] + 256 * last[1]).toBe(wide.at(-1));
  });

  it('codes a message that the train split holds in a few bytes, and the library agrees', () => {
    const tables = train(coder, setup, [oneMessage(noise, 256)]) as PresetTables;
    const message = noise.slice(49_000, 49_200);
    const { bytes } = encode(coder, { ...setup, tables }, [oneMessage(message, 256)]);
    expect(bytes.length).toBeLessThan(10);
    expect(inflateRawSync(bytes, { dictionary: tables.dictionary })).toEqual(Buffer.from(message));
    expect(() => decodeBytes('deflate', setupOf(), { bytes })).toThrow(CorruptStreamError);
  });

  it('sees the train split only: what is coded does not change the dictionary', () => {
    const messageEnds = Uint32Array.of(1000, 2000);
    const one = { alphabetSize: 256, symbols: noise.slice(0, 2000), messageEnds };
    const other = { ...one, symbols: one.symbols.map((symbol, i) => (i < 1000 ? symbol : 0)) };
    expect(unitOf(coder, setup, one).encoderSetup.tables).toEqual(
      unitOf(coder, setup, other).encoderSetup.tables,
    );
  });

  it('says so when its dictionary is missing', () => {
    expect(() => coder.encoder(setup)).toThrow(PromiseError);
    expect(() => coder.encoder({ ...setup, tables: { coder: 'huffman' } })).toThrow(PromiseError);
  });

  it('describes the dictionary by its size alone', () => {
    const tables = train(coder, setup, [oneMessage(noise.subarray(0, 100), 256)]);
    expect(coder.describeTables!(tables, setup)).toEqual([
      'dictionary: 100 bytes, the newest of the train split last',
    ]);
  });
});
