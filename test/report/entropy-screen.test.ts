import { describe, expect, it } from 'vitest';
import { type EntropyRecord, runRecordSchema } from '../../src/harness/run-record.ts';
import { type EntropyScreenOptions, entropyScreen } from '../../src/report/entropy-screen.ts';
import { contradicted, corpus, steady } from './sample-entropy.ts';

/** Layout is held by kept text; the figures in it come from a report made up by hand. */

const usual: EntropyScreenOptions = {
  columns: 100,
  all: false,
  ascii: false,
  sentenceOf: () => 'One sentence on what is estimable and what is useful.',
  next: 'bitassay try uplink.bin',
};

const screen = (entries: EntropyRecord[], options: Partial<EntropyScreenOptions> = {}): string =>
  entropyScreen(corpus, entries, { ...usual, ...options });

/** Lines joined, so that a sentence is found wherever it breaks. */
const prose = (text: string): string => text.replace(/\s+/g, ' ');

describe.each([100, 80])('the entropy screen at %i columns', (columns) => {
  it.each<[string, EntropyRecord[], Partial<EntropyScreenOptions>]>([
    ['entropy', [steady], {}],
    ['entropy-all', [steady], { all: true }],
    ['entropy-contradicted', [contradicted], {}],
    ['entropy-ascii', [steady], { ascii: true }],
  ])('%s', async (name, entries, options) => {
    const text = screen(entries, { ...options, columns });
    for (const line of text.split('\n')) {
      expect([...line].length, line).toBeLessThanOrEqual(columns);
    }
    await expect(text).toMatchFileSnapshot(`screens/${name}-${columns}.txt`);
  });
});

describe('the entropy screen', () => {
  it('shows records that the schema takes', () => {
    for (const entry of [steady, contradicted]) {
      expect(runRecordSchema.shape.entropy.element.safeParse(entry).error?.issues).toBeUndefined();
    }
    expect(runRecordSchema.shape.corpora.element.safeParse(corpus).error?.issues).toBeUndefined();
  });

  it('greys what is not estimable where there are colours, in place of parentheses', () => {
    const text = screen([steady], { dim: (line) => `<${line}>` });
    const greyed = text.split('\n').filter((line) => line.startsWith('<'));
    expect(greyed).toHaveLength(1);
    expect(greyed[0]).toMatch(/^< +3 +1\.50 +– +no +no>$/);
    expect(text).not.toMatch(/\(1\.50\)|Figures in parentheses/);
    expect(screen([steady])).toMatch(/\(1\.50\)/);
  });

  it('says plainly that the estimate was wrong where a coder needs less than its interval', () => {
    expect(prose(screen([contradicted]))).toContain(
      'ctw:depth=6 needs 2.50, below the corrected entropy of order 2 and below its whole interval: as a floor that estimate was wrong.',
    );
    const within = { ...contradicted, floor: { ...contradicted.floor, high: 2.9, point: 2.9 } };
    expect(prose(screen([within]))).toMatch(
      /needs 2\.90, below .* order 2: that order is not enough/,
    );
    expect(screen([within])).not.toMatch(/was wrong/);
  });

  it('names the ceilings, and those that could not be run with the reason', () => {
    const text = prose(screen([steady]));
    expect(text).toContain('arith:order=2 3.40, arith:order=1 4.20, fixed 8.00');
    expect(text).toContain('No ceiling by arith:order=4: the contexts of this model need');
    expect(text).toContain('No ceiling by ctw:depth=6: context-tree weighting would take too long');
  });

  it('says which figures are bounds, also where no coder was run', () => {
    const said = 'from one finite sample no lower bound on the rate holds for every source';
    expect(prose(screen([steady]))).toContain(said);
    const { no_ceilings: _none, ...rest } = steady;
    const text = prose(screen([{ ...rest, ceilings: [{ name: 'fixed', rate: 8 }] }]));
    expect(text).toContain('that is the fixed width, since no coder was run');
  });

  it('says what was sampled, and leaves out what there is not', () => {
    const { corpus: name, contexts, floor } = steady;
    const bare = { corpus: name, contexts, floor, orders, sampled_symbols: 33_554_432 };
    const text = screen([bare]);
    expect(text).toMatch(
      /Sampled: the figures rest on 33 554 432 symbols in 64 evenly spread pieces/,
    );
    expect(text).not.toMatch(/Change along the data|How much data|undefined|NaN/);
  });

  it('uses no character beyond ASCII where asked', () => {
    for (const all of [false, true]) {
      const text = screen([steady, contradicted], { ascii: true, all });
      // biome-ignore lint/suspicious/noControlCharactersInRegex: all of ASCII is meant
      expect(text).toMatch(/^[\x00-\x7f]*$/);
    }
  });

  it('never breaks a count in two', () => {
    for (let columns = 60; columns <= 120; columns++) {
      expect(screen([steady], { columns, all: true })).not.toMatch(/\d\n +000\b/);
    }
  });
});

const orders = [
  { k: 0, plug_in: 1, corrected: 1, positions: 9, contexts: 1, pairs: 2, estimable: false },
];
