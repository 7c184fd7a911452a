import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseCandidate } from '../../src/coders/candidate.ts';
import type { Setup } from '../../src/coders/contract.ts';
import { columnsOf } from '../../src/models/field-columns.ts';
import { selectFields } from '../../src/models/field-selection.ts';
import { COST_PER_BIT } from '../../src/models/table-cost.ts';
import { fieldChoiceText } from '../../src/symbols/field-choice.ts';
import { parseRecordField, type RecordShape } from '../../src/symbols/record.ts';
import { RecordLayout } from '../../src/symbols/record-layout.ts';
import { encode, train } from '../conformance/cells.ts';
import { integers } from '../conformance/sequences.ts';

const PER_MESSAGE = 10;

/** Bytes of records whose fields are given by value, 16 bits each. */
function recordsOf(layout: RecordLayout, count: number, valuesAt: (i: number) => number[]) {
  const bytes = new Uint8Array(count * layout.bytes);
  for (let i = 0; i < count; i++)
    layout.putTogether(
      Uint32Array.from(valuesAt(i), (v) => v & 0xffff),
      bytes,
      i * layout.bytes,
    );
  return bytes;
}

const startsOf = (count: number) =>
  Uint8Array.from({ length: count }, (_, i) => (i % PER_MESSAGE === 0 ? 1 : 0));

const shape = (...names: string[]): RecordShape => ({
  bytes: 2 * names.length,
  fields: names.map((name, i) => parseRecordField(name, `u16le@${2 * i}`, 2 * names.length)),
});

describe('selectFields', () => {
  it('finds the transform that a source was made with', () => {
    const record = shape('walk', 'ramp', 'noise', 'bits', 'echo');
    const layout = new RecordLayout(record);
    const next = integers(5);
    let walk = 30_000;
    let ramp = 0;
    let slope = 40;
    let bits = 0x5a5a;
    const count = 4000;
    const bytes = recordsOf(layout, count, () => {
      const step = next() % 8 === 0 ? (next() % 4000) - 2000 : 0;
      walk += step;
      slope += (next() % 3) - 1;
      ramp += slope;
      bits ^= 1 << (next() % 16);
      // As large as the step of the walk, and not known otherwise.
      const echo = step === 0 ? 0 : 700 + (next() % 8);
      return [walk, ramp, next(), bits, echo];
    });
    const selections = selectFields(columnsOf(layout, bytes, startsOf(count)));
    const picked = selections.map(({ choice }) => fieldChoiceText(choice));
    expect(picked[0]).toBe('delta');
    expect(picked[1]).toMatch(/^delta2/);
    // Nothing saves on noise: 16 bits a record stay, whatever is picked by the luck of the draw.
    expect(selections[2].cost / COST_PER_BIT).toBeGreaterThan((16 * count) / 2);
    expect(picked[3]).toBe('xor');
    expect(picked[4]).toBe('raw/field:walk');
  });

  it('gives the same again, and never more than raw without context', () => {
    const drawn = fc.record({
      seed: fc.integer({ min: 1, max: 2 ** 30 }),
      count: fc.nat({ max: 300 }),
      steps: fc.array(fc.constantFrom(1, 3, 100, 65_536), { minLength: 3, maxLength: 3 }),
    });
    fc.assert(
      fc.property(drawn, ({ seed, count, steps }) => {
        const layout = new RecordLayout(shape('a', 'b', 'c'));
        const next = integers(seed);
        const values = [0, 0, 0];
        const bytes = recordsOf(layout, count, () =>
          steps.map((step, f) => {
            values[f] += (next() % step) - Math.floor(step / 2);
            return values[f];
          }),
        );
        const columns = columnsOf(layout, bytes, startsOf(count));
        const selections = selectFields(columns);
        expect(selectFields(columns)).toEqual(selections);
        for (const { cost, plainCost } of selections) expect(cost).toBeLessThanOrEqual(plainCost);
      }),
      { numRuns: 40 },
    );
  });

  it('costs are what the coder then spends: tables of every other run, payload of the others', () => {
    const record = shape('a', 'b', 'c', 'd');
    const layout = new RecordLayout(record);
    const next = integers(17);
    const values = [500, 9000, 40_000, 9000];
    const count = 3200;
    const bytes = recordsOf(layout, count, () => {
      values[0] += (next() % 5) - 2;
      values[1] += (next() % 900) - 450;
      values[2] = next() % 3 === 0 ? next() : values[2];
      values[3] += Math.floor((values[1] - values[3]) / 2) + (next() % 9);
      return values;
    });
    const selections = selectFields(columnsOf(layout, bytes, startsOf(count)));
    // Runs of a sixteenth, by turns; messages lie whole in them.
    const run = bytes.length / 16;
    const side = (turn: number) => bytes.filter((_, at) => Math.floor(at / run) % 2 === turn);
    const setup: Setup = {
      policy: 'shipped',
      alphabetSize: 256,
      reset: 'message',
      lengths: 'known',
      align: 1,
      record,
    };
    const sequence = (symbols: Uint8Array) => ({
      alphabetSize: 256,
      symbols,
      messageEnds: Uint32Array.from(
        { length: symbols.length / (layout.bytes * PER_MESSAGE) },
        (_, i) => (i + 1) * layout.bytes * PER_MESSAGE,
      ),
    });
    const spent = (map: string) => {
      const coder = parseCandidate(`fields:map=${map}`).create();
      const tables = train(coder, setup, [sequence(side(0))]);
      return encode(coder, { ...setup, tables }, [sequence(side(1))]).payloadBits;
    };
    const total = (costs: number[]) => costs.reduce((a, b) => a + b, 0) / COST_PER_BIT;
    const map = selections.map(({ choice }, f) => `${layout.names[f]}:${fieldChoiceText(choice)}`);
    expect(map[3]).toMatch(/^d:linear:b/);
    // Each of the 6400 tokens costs at most two units of 1/65536 bit more than its logarithm; the
    // stage loses less.
    const slack = (2 * 6400) / COST_PER_BIT;
    expect(Math.abs(spent(map.join('+')) - total(selections.map((s) => s.cost)))).toBeLessThan(
      slack,
    );
    const plain = total(selections.map((s) => s.plainCost));
    expect(Math.abs(spent('a:raw') - plain)).toBeLessThan(slack);
  });
});
