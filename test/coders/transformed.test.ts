import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseCandidate, parseCandidates } from '../../src/coders/candidate.ts';
import type { Setup } from '../../src/coders/contract.ts';
import { CorruptStreamError, InputError, LimitError } from '../../src/errors/errors.ts';
import { oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';
import { parseTransformChain } from '../../src/transforms/chain.ts';
import { decode, encode, inputOf, unitOf } from '../conformance/cells.ts';
import { sequences } from '../conformance/sequences.ts';

const setupOf = (over: Partial<Setup>): Setup => ({
  policy: 'sent',
  alphabetSize: 256,
  reset: 'message',
  lengths: 'sent',
  align: 8,
  ...over,
});

function transformedBy(chain: string, sequence: SymbolSequence, runsOn: boolean): SymbolSequence {
  return parseTransformChain(chain).forward(sequence.alphabetSize, runsOn).push(sequence);
}

describe('after=', () => {
  it('codes exactly what the coder makes of the transformed symbols', () => {
    const kinds: [Partial<Setup>, boolean][] = [
      [{ policy: 'sent', reset: 'message' }, false],
      [{ policy: 'sent', reset: 'never' }, true],
      [{ policy: 'shipped' }, false],
      [{ policy: 'learned', reset: 'never' }, true],
      [{ policy: 'learned', reset: 'message', lengths: 'link' }, false],
      [{ policy: 'primed', reset: 'never', lengths: 'known' }, true],
    ];
    const chains: [string, number][] = [
      ['lag2.zigzag', 256],
      ['delta.byte-planes', 65_536],
      ['bit-planes', 3],
    ];
    for (const [over, runsOn] of kinds) {
      for (const [chain, alphabetSize] of chains) {
        const with_ = parseCandidate(`arith:order=1,after=${chain}`).create();
        const without = parseCandidate('arith:order=1').create();
        const setup = setupOf({ ...over, alphabetSize });
        const after = parseTransformChain(chain).shape(alphabetSize).alphabetSize;
        fc.assert(
          fc.property(sequences(alphabetSize), (whole) => {
            const unit = unitOf(with_, setup, whole);
            // Training runs on over the train split and coding starts anew, so the two are transformed apart.
            const innerSetup = { ...unit.encoderSetup, alphabetSize: after };
            const inner = transformedBy(chain, unit.sequence, runsOn);
            expect(encode(with_, unit.encoderSetup, [unit.sequence])).toEqual(
              encode(without, innerSetup, [inner]),
            );
            const { fit, ...price } = without.price!(inner, innerSetup);
            expect(fit).toBeDefined();
            expect(with_.price!(unit.sequence, unit.encoderSetup)).toEqual(price);
          }),
          { seed: 31, numRuns: 5 },
        );
      }
    }
  });

  it('trains on the transformed train split', () => {
    // A ramp: after delta only one symbol is left, which costs nothing to speak of.
    const ramp = Uint8Array.from({ length: 2000 }, (_, i) => (3 * i) % 256);
    const coder = parseCandidate('huffman:after=delta').create();
    const setup = setupOf({ policy: 'shipped' });
    const trainer = coder.trainer!(setup);
    trainer.push(oneMessage(ramp, 256));
    const tables = trainer.finish();
    const { payloadBits } = encode(coder, { ...setup, tables }, [oneMessage(ramp, 256)]);
    // One bit a symbol, and a few for the first, which differs from 0.
    expect(payloadBits).toBeLessThan(2000 + 32);
    expect(coder.describeTables!(tables, setup).length).toBeGreaterThan(0);
  });

  it('cannot be given what its alphabet does not allow', () => {
    const check = (candidate: string, alphabetSize: number) => () =>
      parseCandidate(candidate).create().check!(setupOf({ alphabetSize }));
    expect(check('huffman:after=xor', 3)).toThrow(InputError);
    expect(check('huffman:after=byte-planes', 256)).toThrow(/nothing to take apart/);
    expect(check('huffman:after=delta', 2 ** 24 + 1)).toThrow(/too large for huffman/);
    check('huffman:after=byte-planes', 2 ** 32)();
    check('huffman:after=delta', 2 ** 24)();
    // The coder's own check still speaks: 256 symbols need words of 8 bits.
    expect(check('huffman:maxbits=7,after=delta', 256)).toThrow(/words of up to 8 bits/);
    check('huffman:maxbits=7,after=bit-planes', 256)();
  });

  it('widens the alphabet where planes bring it down', () => {
    expect(parseCandidate('arith:order=1,after=delta').declaration.maxAlphabetSize).toBe(65_536);
    const planes = parseCandidate('arith:order=1,after=byte-planes').declaration;
    expect(planes.maxAlphabetSize).toBe(2 ** 32);
    expect(planes.needsWholeMessage).toBe(true);
    expect(parseCandidate('arith:order=1,after=delta').declaration.needsWholeMessage).toBe(false);
  });

  it('a decoder refuses half a symbol and counts beyond 32 bits', () => {
    const sequence = oneMessage(Uint8Array.of(1, 2, 3), 256);
    const setup = setupOf({ policy: 'none' });
    const coded = encode(parseCandidate('fixed').create(), setup, [sequence]);
    const planes = parseCandidate('fixed:after=byte-planes').create();
    const wide = { ...setup, alphabetSize: 65_536 };
    expect(() => decode(planes, wide, inputOf(setup, coded, sequence), 10)).toThrow(
      CorruptStreamError,
    );
    const known = {
      bytes: coded.bytes,
      messageCount: 1,
      symbolCounts: Uint32Array.of(2 ** 31),
    };
    expect(() => decode(planes, { ...wide, lengths: 'known' }, known, 2 ** 32)).toThrow(LimitError);
  });
});

describe('the keys that every coder takes', () => {
  it.each([
    ['rice:after=delta.zigzag,k=2', 'rice:k=2,after=delta.zigzag'],
    ['rice:stored=on,k=2', 'rice:k=2,stored=on'],
    ['huffman:after=lag024, stored=on', 'huffman:stored=on,after=lag24'],
    ['huffman:stored=off', 'huffman'],
    ['deflate:after=xor', 'deflate:after=xor'],
  ])('%s is %s', (text, id) => {
    const candidate = parseCandidate(text);
    expect(candidate.id).toBe(id);
    expect(parseCandidate(id).id).toBe(id);
  });

  it('stand among the values, for records', () => {
    expect(parseCandidate('rice:k=2,stored=on,after=delta').values).toEqual({
      k: 2,
      stored: 'on',
      after: 'delta',
    });
    expect(parseCandidate('rice:stored=off').values).toEqual({});
  });

  it('go with ranges of the coder’s own keys', () => {
    expect(parseCandidates('rice:k=1..3,after=delta').map(({ id }) => id)).toEqual([
      'rice:k=1,after=delta',
      'rice:k=2,after=delta',
      'rice:k=3,after=delta',
    ]);
  });

  it.each([
    ['huffman:stored=yes', /on \| off/],
    ['huffman:aftr=delta', /Did you mean after/],
    ['huffman:strored=on', /Did you mean stored/],
    ['huffman:after=delta.zagzig', /zigzag/],
    ['huffman:after=dleta', /Did you mean delta/],
    ['huffman:lanes=4', /not built yet/],
    ['huffman:tables_in_set=65', /from 1 to 64/],
    ['fixed:tables_in_set=2', /shipped/],
  ])('%s is refused with a hint', (text, hint) => {
    let error: unknown;
    try {
      parseCandidate(text);
    } catch (thrown) {
      error = thrown;
    }
    expect(error).toBeInstanceOf(InputError);
    const { message, where } = error as InputError;
    expect(`${message} ${where.expected} ${where.advice}`).toMatch(hint);
  });
});
