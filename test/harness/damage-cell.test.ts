import seedrandom from 'seedrandom';
import { describe, expect, it } from 'vitest';
import { type Candidate, parseCandidate } from '../../src/coders/candidate.ts';
import type { Lengths, Reset, TablePolicy } from '../../src/coders/contract.ts';
import { coderEntries } from '../../src/coders/registry.ts';
import { PromiseError } from '../../src/errors/errors.ts';
import { type Cell, listCells } from '../../src/harness/cells.ts';
import { type CorpusData, unitsOf } from '../../src/harness/corpus-data.ts';
import { damageCell } from '../../src/harness/damage-cell.ts';
import type { DamagePlan } from '../../src/harness/damage-experiment.ts';
import type { CellDamage } from '../../src/harness/damage-schema.ts';
import { lossFigures } from '../../src/harness/loss.ts';
import { memoryCorpus } from '../../src/harness/memory-corpus.ts';
import { encodeUnit, setupOf } from '../../src/harness/run-cell.ts';

const goOn = async () => {};

function cellOf(
  candidate: string | Candidate,
  policy: TablePolicy = 'shipped',
  reset: Reset = 'message',
  align = 8,
): Cell {
  const parsed = typeof candidate === 'string' ? parseCandidate(candidate) : candidate;
  return listCells(['a'], [parsed], [policy], [reset], { align }).cells[0];
}

async function damage(cell: Cell, corpus: CorpusData, plan: DamagePlan): Promise<CellDamage> {
  const figures = await damageCell(cell, corpus, plan, goOn);
  expect(figures).toHaveLength(1);
  return figures[0];
}

/** Equally likely bytes below `size`, in messages of `length`. */
function noise(count: number, length: number, size = 256, seed = 'noise'): Uint8Array[] {
  const next = seedrandom(seed);
  return Array.from({ length: count }, () =>
    Uint8Array.from({ length }, () => Math.floor(next() * size)),
  );
}

/** The candidate with a decoder that finds zeros behind the message, so that it never runs out of bits. */
function endless(text: string): Candidate {
  const candidate = parseCandidate(text);
  const create = () => {
    const coder = candidate.create();
    const decoder: typeof coder.decoder = (setup, limits) => ({
      decode: (input) => {
        const bytes = new Uint8Array(input.bytes.length + 1000);
        bytes.set(input.bytes);
        return coder.decoder(setup, limits).decode({ ...input, bytes });
      },
    });
    return { ...coder, decoder };
  };
  return { ...candidate, create };
}

/** So rare that a damaged message has one hit. */
const RARE = 1e-12;
const all = (x: number) => ({ mean: x, mean_error: 0, p95: x, max: x });

describe('a code of fixed width, in bytes', () => {
  const corpus = memoryCorpus('a', noise(50, 20), { lengths: 'known' });

  it('has one wrong symbol for each flipped bit, which only a check sees', async () => {
    const one = await damage(cellOf('fixed', 'none'), corpus, { flip: RARE });
    expect(one).toMatchObject({
      kind: 'flip',
      probability: RARE,
      seed: 1,
      events: 2000,
      errors: 2000,
      detected: 0,
      by_check: 2000,
      undetected: 0,
      harmless: 0,
      symbols_lost: all(1),
      recovery: all(1),
      messages_after: all(0),
    });
    // Of 160 bits: 1 − (1 − p)^160, which is 160 p where p is tiny.
    expect(one.share / (160 * RARE)).toBeCloseTo(1, 9);
    const two = await damage(cellOf('fixed', 'none'), corpus, { flip: 0.25 });
    expect(two.share).toBeCloseTo(1 - 0.75 ** 160, 12);
    // Each of 160 bits with probability ¼: 40 of them, and 1 − ¾⁸ of 20 symbols wrong.
    const error = 5 / Math.sqrt(2000);
    expect(Math.abs(two.errors / 2000 - 40)).toBeLessThan(error * Math.sqrt(160 * 0.25 * 0.75));
    const wrong = 1 - 0.75 ** 8;
    expect(Math.abs(two.symbols_lost.mean - 20 * wrong)).toBeLessThan(
      error * Math.sqrt(20 * wrong * (1 - wrong)),
    );
    // Half of the 95 % interval by the binomial law; a deviation that 2000 draws estimate is right to 1 ÷ √4000 of it.
    const half = 1.96 * Math.sqrt((20 * wrong * (1 - wrong)) / 2000);
    expect(Math.abs(two.symbols_lost.mean_error / half - 1)).toBeLessThan(5 / Math.sqrt(4000));
  });

  it('lacks a symbol for each lost byte, which its decoder sees', async () => {
    const figures = await damage(cellOf('fixed', 'none'), corpus, { lose_bytes: RARE });
    expect(figures).toMatchObject({
      errors: 2000,
      detected: 2000,
      symbols_lost: all(20),
      recovery: all(20),
    });
  });
});

describe('a prefix code', () => {
  /** Lengths 1, 2, 3, 3: canonical words of dyadic shares. */
  const WORDS = ['0', '10', '110', '111'];
  const shares = [0, 0, 0, 0, 1, 1, 2, 3];
  const next = seedrandom('prefix');
  const symbols = Uint8Array.from({ length: 40 }, () => shares[Math.floor(next() * 8)]);
  const train = Uint8Array.from({ length: 8000 }, (_, i) => shares[i % 8]);
  const sequence = (bytes: Uint8Array) => ({
    alphabetSize: 4,
    symbols: bytes,
    messageEnds: Uint32Array.of(bytes.length),
  });
  const corpus = memoryCorpus('a', sequence(symbols), {
    train: sequence(train),
    lengths: 'known',
  });

  /**
   * Every single flip, decoded by hand from a string of bits: 40 words are read, zeros fill the last byte, and more bits
   * than there are is all that the decoder can notice (with an align of 1 nothing is padded).
   */
  function everyFlip() {
    const bits = [...symbols].map((symbol) => WORDS[symbol]).join('');
    return [...bits].map((_, at) => {
      const flipped = `${bits.slice(0, at)}${1 - Number(bits[at])}${bits.slice(at + 1)}`;
      const carried = flipped.padEnd(Math.ceil(bits.length / 8) * 8, '0');
      const out: number[] = [];
      let from = 0;
      while (out.length < symbols.length) {
        const symbol = WORDS.findIndex((word) => carried.startsWith(word, from));
        if (symbol < 0) return { detected: true, lost: symbols.length, recovery: symbols.length };
        out.push(symbol);
        from += WORDS[symbol].length;
      }
      const wrong = out.flatMap((symbol, i) => (symbol === symbols[i] ? [] : [i]));
      return {
        detected: false,
        lost: wrong.length,
        recovery: wrong.length === 0 ? 0 : wrong[wrong.length - 1] - wrong[0] + 1,
      };
    });
  }

  it('falls back into step as a simulation by hand does', async () => {
    const flips = everyFlip();
    const figures = await damage(cellOf('huffman', 'shipped', 'message', 1), corpus, {
      flip: RARE,
    });
    expect(figures.events).toBe(2000);
    // 2000 draws of some 70 bits miss one of them with a probability below 10⁻¹⁰: the extremes are met exactly.
    expect(figures.symbols_lost.max).toBe(Math.max(...flips.map(({ lost }) => lost)));
    expect(figures.recovery!.max).toBe(Math.max(...flips.map(({ recovery }) => recovery)));
    // Means are kept to a thousandth.
    const ROUNDED = 0.0005;
    const held = (values: readonly number[], got: number) => {
      const mean = values.reduce((a, b) => a + b, 0) / values.length;
      const variance = values.reduce((sum, x) => sum + (x - mean) ** 2, 0) / values.length;
      expect(Math.abs(got - mean)).toBeLessThanOrEqual(5 * Math.sqrt(variance / 2000) + ROUNDED);
    };
    held(
      flips.map(({ lost }) => lost),
      figures.symbols_lost.mean,
    );
    held(
      flips.map(({ recovery }) => recovery).filter((recovery) => recovery > 0),
      figures.recovery!.mean,
    );
    held(
      flips.map(({ detected }) => Number(detected)),
      figures.detected / 2000,
    );
    held(
      flips.map(({ lost }) => Number(lost === 0)),
      figures.harmless / 2000,
    );
    // Neither extreme: the code does fall back into step, and not at once.
    expect(figures.recovery!.mean).toBeGreaterThan(1);
    expect(figures.recovery!.mean).toBeLessThan(symbols.length / 2);
  });
});

describe('an arithmetic code', () => {
  it('loses the rest of the message, since a decoder off its interval is right by chance alone', async () => {
    // Noise costs 8 bits a symbol throughout, so that a flip anywhere in 400 symbols leaves half of them on average, of which
    // one of 256 is right by chance; the deviation is that of a place on a line.
    const length = 400;
    const corpus = memoryCorpus('a', noise(1, length)[0], {
      train: noise(1, 1 << 16, 256, 'train')[0],
      lengths: 'known',
    });
    // Without padding, which would have to be zeros, nothing tells the decoder.
    const cell = cellOf(endless('arith:order=0'), 'shipped', 'message', 1);
    const figures = await damage(cell, corpus, { flip: RARE });
    expect(figures.by_check).toBe(2000);
    const error = 5 * (length / Math.sqrt(12) / Math.sqrt(2000));
    expect(Math.abs(figures.symbols_lost.mean - (length / 2) * (255 / 256))).toBeLessThan(error);
    // From the first wrong symbol on all are lost but those right by chance.
    expect(figures.symbols_lost.mean / figures.recovery!.mean).toBeGreaterThan(0.98);
  });
});

describe('spread past the message', () => {
  const messages = 24;
  const corpus = memoryCorpus('a', noise(messages, 30, 200), { lengths: 'link' });
  const flips = (reset: Reset) =>
    damage(cellOf('arith:order=0', 'learned', reset), corpus, { flip: RARE });

  /** Messages up to the reset behind one that is drawn by its bits, and the deviation of the mean of 2000. */
  function laterMessages(reset: Reset, apart: number) {
    const cell = cellOf('arith:order=0', 'learned', reset);
    const weights = unitsOf(corpus, reset).flatMap((unit) => {
      const ends = encodeUnit(cell, setupOf(cell, corpus, unit), unit).messageEndsBits;
      return [...ends].map((end, i) => ({
        bits: end - (i === 0 ? 0 : ends[i - 1]),
        later: apart - 1 - i,
      }));
    });
    const total = weights.reduce((sum, { bits }) => sum + bits, 0);
    const mean = weights.reduce((sum, { bits, later }) => sum + bits * later, 0) / total;
    const square = weights.reduce((sum, { bits, later }) => sum + bits * later * later, 0) / total;
    return { mean, deviation: Math.sqrt((square - mean * mean) / 2000) };
  }

  it('is none under reset message', async () => {
    expect((await flips('message')).messages_after).toEqual(all(0));
  });

  it('is all later messages under never, for a coder that adapts', async () => {
    const { messages_after: after, events, symbols_lost: lost } = await flips('never');
    expect(events).toBe(2000);
    const expected = laterMessages('never', messages);
    expect(after.max).toBe(messages - 1);
    expect(Math.abs(after.mean - expected.mean)).toBeLessThan(5 * expected.deviation);
    expect(lost.max).toBeGreaterThan(0.98 * 30 * (messages - 1));
  });

  it('ends at the reset under message*R', async () => {
    const { messages_after: after } = await flips('message*4');
    expect(after.max).toBe(3);
    const expected = laterMessages('message*4', 4);
    expect(Math.abs(after.mean - expected.mean)).toBeLessThan(5 * expected.deviation);
  });

  it('is none where words are fixed and the link tells where each message ends', async () => {
    // Huffman tables that stand in the first message: damage elsewhere stays in its message, a first one lost takes all.
    const figures = await damage(cellOf('huffman', 'sent', 'never'), corpus, {
      lose_messages: RARE,
    });
    const first = figures.detected + figures.by_check;
    expect(figures.messages_after.max).toBe(messages - 1);
    expect(figures.undetected).toBe(figures.events - first);
    // One of 24 runs takes the first message.
    const chance = 1 / messages;
    expect(Math.abs(first / figures.events - chance)).toBeLessThan(
      5 * Math.sqrt((chance * (1 - chance)) / figures.events),
    );
    expect(figures.messages_after.p95).toBe(0);
  });
});

describe('lost messages', () => {
  const corpus = memoryCorpus('a', noise(500, 10), { lengths: 'link' });

  it('are lost alone where messages decode alone, and seen by nobody', async () => {
    const burst = { good_to_bad: 0.05, bad_to_good: 0.25 };
    const figures = await damage(cellOf('fixed', 'none'), corpus, { lose_messages: burst });
    // All is lost in the bad state unless the plan says otherwise: 0.05 ÷ 0.3, in runs of 4.
    expect(figures).toMatchObject({
      good_to_bad: 0.05,
      bad_to_good: 0.25,
      lost_in_bad: 1,
      lost_in_good: 0,
      events: 2000,
      detected: 0,
      by_check: 0,
      undetected: 2000,
      messages_after: all(0),
    });
    expect(figures).not.toHaveProperty('probability');
    expect(figures.share).toBeCloseTo(1 / 6, 12);
    expect(figures.unusable_share).toBeCloseTo(1 / 6, 12);
    // Runs are geometric with mean 4 and variance 12. One that begins with i messages left loses 4·¾ⁱ:
    // 12 ÷ 500 on average over i from 1 to 500.
    expect(Math.abs(figures.errors / 2000 - (4 - 12 / 500))).toBeLessThan(5 * Math.sqrt(12 / 2000));
    expect(figures.symbols_lost.mean).toBeCloseTo((10 * figures.errors) / 2000, 3);
  });

  it('make as many unusable as the closed form of independent losses says', async () => {
    for (const reset of ['message', 'message*8', 'never'] as const) {
      const cell = cellOf('arith:order=0', 'learned', reset);
      const figures = await damage(cell, corpus, { lose_messages: 0.03 });
      expect(figures.probability).toBe(0.03);
      expect(figures.unusable_share).toBeCloseTo(lossFigures(cell, corpus, 0.03).share, 10);
    }
  });

  it('spoil what a coder learns from, up to the reset', async () => {
    const figures = await damage(cellOf('arith:order=0', 'learned', 'message*8'), corpus, {
      lose_messages: RARE,
    });
    expect(figures.messages_after.max).toBe(7);
    expect(figures.errors).toBe(figures.events);
    // 0 to 7 follow, 3.5 on average, but 0 to 3 in the last unit: 62 units of 8, one of 4.
    expect(Math.abs(figures.messages_after.mean - (496 * 3.5 + 4 * 1.5) / 500)).toBeLessThan(
      5 * Math.sqrt(63 / 12 / figures.events),
    );
  });
});

describe('figures of damage', () => {
  const corpus = memoryCorpus('a', noise(40, 25, 30), { train: noise(40, 25, 30, 'train') });
  const plan: DamagePlan = { flip: 0.001, lose_bytes: 0.002, lose_messages: 0.01 };

  it('are the same for the same seed, and others for another', async () => {
    const run = (seed: number) => damageCell(cellOf('huffman'), corpus, { ...plan, seed }, goOn);
    const first = await run(7);
    expect(await run(7)).toEqual(first);
    const second = await run(8);
    expect(second).not.toEqual(first);
    expect(second.map(({ share }) => share)).toEqual(first.map(({ share }) => share));
    expect(first.map(({ kind }) => kind)).toEqual(['flip', 'lose_bytes', 'lose_messages']);
  });

  it('do not depend on what else the plan asks', async () => {
    const [, bytes] = await damageCell(cellOf('huffman'), corpus, plan, goOn);
    expect(await damage(cellOf('huffman'), corpus, { lose_bytes: 0.002 })).toEqual(bytes);
  });

  it('are in whole events', async () => {
    for (const d of await damageCell(cellOf('arith:order=1', 'learned'), corpus, plan, goOn)) {
      expect(d.detected + d.by_check + d.undetected + d.harmless).toBe(d.events);
    }
  });

  it('are fewer where each takes long to decode, and none where there is nothing', async () => {
    const long = memoryCorpus('a', noise(1, 1 << 17)[0], { lengths: 'sent' });
    // 2²² symbols at most, of 2¹⁷ each.
    expect((await damage(cellOf('fixed', 'none'), long, { flip: 1e-6 })).events).toBe(32);
    const empty = memoryCorpus('a', [], { lengths: 'sent' });
    expect(await damageCell(cellOf('fixed', 'none'), empty, plan, goOn)).toEqual([]);
    // One symbol only, the count granted: messages of no bits, of which none can be hit.
    const nothing = memoryCorpus(
      'a',
      { alphabetSize: 1, symbols: new Uint8Array(9), messageEnds: Uint32Array.of(4, 9) },
      { lengths: 'known' },
    );
    const figures = await damage(cellOf('fixed', 'none'), nothing, { flip: 0.5 });
    expect(figures).toMatchObject({ share: 0, events: 0, errors: 0, symbols_lost: all(0) });
    expect(figures).not.toHaveProperty('recovery');
  });

  it('stop between damages', async () => {
    let left = 3;
    const stop = async () => {
      if (left-- === 0) throw new Error('stopped');
    };
    await expect(damageCell(cellOf('huffman'), corpus, plan, stop)).rejects.toThrow('stopped');
  });

  it('are refused where a decoder breaks on damaged bytes', async () => {
    const honest = parseCandidate('huffman');
    const broken: Candidate = {
      ...honest,
      create: () => {
        const coder = honest.create();
        return {
          ...coder,
          decoder: (setup, limits) => {
            const decoder = coder.decoder(setup, limits);
            return {
              decode: (input) => {
                try {
                  return decoder.decode(input);
                } catch {
                  throw new RangeError('offset is out of bounds');
                }
              },
            };
          },
        };
      },
    };
    const refused = damageCell(cellOf(broken), corpus, { lose_bytes: 0.1 }, goOn);
    await expect(refused).rejects.toThrow(PromiseError);
    await expect(refused).rejects.toMatchObject({
      where: { coder: 'huffman', got: 'RangeError: offset is out of bounds' },
    });
  });
});

describe('every coder', () => {
  const next = seedrandom('every');
  const walk = (count: number) =>
    Array.from({ length: count }, () => {
      let value = 8;
      return Uint8Array.from({ length: 24 }, () => {
        value = Math.max(0, Math.min(15, value + Math.floor(next() * 3) - 1));
        return value;
      });
    });
  const data = walk(30);
  const train = walk(60);
  const record = { bytes: 4, fields: [] };
  // Those that need a parameter.
  const WITH_PARAMETERS = new Map([
    ['fields', 'fields:auto'],
    ['block-huffman', 'block-huffman:n=2'],
    ['arith', 'arith:order=2'],
  ]);
  const candidates = [
    ...coderEntries.map(
      ({ declaration }) => WITH_PARAMETERS.get(declaration.name) ?? declaration.name,
    ),
    'huffman:stored=on',
    'huffman:tables_in_set=3',
    'arith:order=1,after=delta',
  ];

  it.each(candidates)(
    '%s: nothing but the two errors, under all lengths and alignments',
    async (text) => {
      const candidate = parseCandidate(text);
      for (const lengths of ['link', 'known', 'sent'] as Lengths[]) {
        for (const align of [1, 8, 32]) {
          const corpus = memoryCorpus('a', data, { train, lengths, record });
          const { cells } = listCells(
            ['a'],
            [candidate],
            ['shipped', 'sent', 'learned', 'primed'],
            align === 8 ? ['message', 'message*8'] : ['message'],
            { records: new Set(['a']), align },
          );
          for (const cell of cells) {
            const figures = await damageCell(
              cell,
              corpus,
              { flip: 0.02, lose_bytes: 0.05, lose_messages: 0.2 },
              goOn,
              40,
            );
            for (const { events, symbols_lost, messages_after } of figures) {
              expect(events).toBe(40);
              expect(symbols_lost.max).toBeLessThanOrEqual(24 * 30);
              if (cell.reset === 'message') expect(messages_after.max).toBe(0);
            }
          }
        }
      }
    },
  );
});
