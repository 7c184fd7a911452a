import { describe, expect, it } from 'vitest';
import { compareRun } from '../../src/compare/compare-run.ts';
import { runRecordSchema } from '../../src/harness/run-record.ts';
import { corpusSection } from '../../src/report/corpus-section.ts';
import { runScreen } from '../../src/report/run-screen.ts';
import { tryScreen } from '../../src/report/try-screen.ts';
import { linesMessages, linesRecord, wholeRecord } from './sample-record.ts';

/** Layout is held by kept text; the figures in it come from a record made up by hand. */

const screens: [name: string, make: (columns: number) => string][] = [
  [
    'try',
    (columns) =>
      tryScreen(wholeRecord, {
        columns,
        caution:
          'These rates hold for ONE long message. If the product sends packets, ask again with its messages.',
        next: 'bitassay try uplink.bin --messages every=192',
      }),
  ],
  [
    'run',
    (columns) =>
      runScreen(linesRecord, {
        columns,
        compared: compareRun(linesRecord, linesMessages),
        next: 'bitassay entropy plan.yaml',
      }),
  ],
];

describe.each([100, 80])('screens at %i columns', (columns) => {
  it.each(screens)('%s', async (name, make) => {
    const text = make(columns);
    for (const line of text.split('\n'))
      expect([...line].length, line).toBeLessThanOrEqual(columns);
    // biome-ignore lint/suspicious/noControlCharactersInRegex: the escape that starts a colour
    expect(text).not.toMatch(/\u001b/);
    await expect(text).toMatchFileSnapshot(`screens/${name}-${columns}.txt`);
  });
});

describe('a corpus section', () => {
  const withRate = (rate: number): string => {
    const [first, ...rest] = wholeRecord.cells;
    const cells = [{ ...first, candidate: 'rice', rate, carried_bits: rate * 100_000 }, ...rest];
    return corpusSection({ ...wholeRecord, cells }, wholeRecord.corpora[0], { columns: 200 }).join(
      '\n',
    );
  };

  it('says that the estimate was wrong where a cell lies below its whole interval, and only there', () => {
    // The corrected entropy of order 2 is 3.00 in 2.95 to 3.05.
    expect(withRate(2.5)).toMatch(
      /rice needs 2\.50, below the corrected entropy of order 2 \(3\.00\).*was wrong/,
    );
    expect(withRate(2.97)).not.toMatch(/was wrong/);
  });
});

describe('the sample records', () => {
  it.each([wholeRecord, linesRecord])('are run records', (record) => {
    expect(runRecordSchema.safeParse(record).error?.issues).toBeUndefined();
  });
});
