import seedrandom from 'seedrandom';
import { parseCandidate } from '../coders/candidate.ts';
import type { Coded, Decoder, Setup } from '../coders/contract.ts';
import { decoderSetup, symbolCountsOf, trainOn } from '../coders/verify.ts';
import { oneMessage, type SymbolSequence } from '../symbols/sequence.ts';
import type { CellBits, CodedUnit } from './run-cell.ts';
import { encodeUnit } from './run-cell.ts';

/** How fast a cell is, as a multiple of the pacer's speed in the same round. */
export interface Speed {
  /** Seconds of one pass over the test part, in time order. */
  readonly seconds: readonly number[];
  /** Median of pacer time ÷ candidate time; above 1 is faster. */
  readonly speed: number;
  /** Spread: a 95 % bootstrap interval of that median. */
  readonly low: number;
  readonly high: number;
}

export interface SpeedOptions {
  /** Most samples of each direction. */
  readonly repeats: number;
  /** Stop sampling a direction after about this long, but not before three samples. */
  readonly seconds: number;
  readonly seed: number;
}

const SHORTEST_SAMPLE_NS = 50_000n;

/** Runs `work` as often as fills a sample that the clock resolves; seconds of one run. */
function sample(work: () => void): number {
  let runs = 0;
  const start = process.hrtime.bigint();
  let elapsed = 0n;
  while (elapsed < SHORTEST_SAMPLE_NS) {
    work();
    runs++;
    elapsed = process.hrtime.bigint() - start;
  }
  return Number(elapsed) / runs / 1e9;
}

function medianOf(sorted: Float64Array): number {
  const half = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[half] : (sorted[half - 1] + sorted[half]) / 2;
}

function medianWithSpread(
  ratios: readonly number[],
  seed: number,
): { speed: number; low: number; high: number } {
  const speed = medianOf(Float64Array.from(ratios).sort());
  const random = seedrandom(String(seed));
  const draws = 400;
  const medians = new Float64Array(draws);
  const draw = new Float64Array(ratios.length);
  for (let i = 0; i < draws; i++) {
    for (let j = 0; j < draw.length; j++) draw[j] = ratios[Math.floor(random() * ratios.length)];
    medians[i] = medianOf(draw.sort());
  }
  medians.sort();
  return {
    speed,
    low: medians[Math.floor(draws * 0.025)],
    high: medians[Math.ceil(draws * 0.975) - 1],
  };
}

/**
 * Candidate and pacer in turn, the order of each pair drawn by the seed. The candidate is warm: the cell was coded and decoded
 * just before.
 */
function interleave(work: () => void, pacer: () => void, options: SpeedOptions): Speed {
  const random = seedrandom(String(options.seed));
  pacer();
  const seconds: number[] = [];
  const ratios: number[] = [];
  const start = process.hrtime.bigint();
  while (seconds.length < options.repeats) {
    let own: number;
    let paced: number;
    if (random() < 0.5) {
      own = sample(work);
      paced = sample(pacer);
    } else {
      paced = sample(pacer);
      own = sample(work);
    }
    seconds.push(own);
    ratios.push(paced / own);
    if (seconds.length >= 3 && Number(process.hrtime.bigint() - start) / 1e9 > options.seconds)
      break;
  }
  return { seconds, ...medianWithSpread(ratios, options.seed) };
}

/** The reference that every cell is timed against: Huffman only, the whole test part as one message. */
export class Pacer {
  readonly #encode: () => Coded;
  readonly #decode: () => void;

  constructor(test: SymbolSequence) {
    const candidate = parseCandidate('deflate-huffman');
    const sequence = oneMessage(test.symbols, test.alphabetSize);
    const setup: Setup = {
      policy: 'none',
      alphabetSize: test.alphabetSize,
      reset: 'message',
      lengths: 'sent',
      align: 8,
    };
    this.#encode = () => {
      const encoder = candidate.create().encoder(setup);
      encoder.push(sequence);
      return encoder.finish();
    };
    const coded = this.#encode();
    const decoder = candidate.create().decoder(setup, { maxSymbols: test.symbols.length });
    this.#decode = () => {
      decoder.decode({ bytes: coded.bytes, messageCount: 1 });
    };
  }

  /** Encode and decode speed of a verified cell, one after the other, alone on this thread. */
  time(bits: CellBits, options: SpeedOptions): { encode: Speed; decode: Speed } {
    const encode = interleave(
      () => {
        for (const unit of bits.units) encodeUnit(bits.cell, refitted(bits, unit), unit.sequence);
      },
      this.#encode,
      options,
    );
    const inputs = bits.units.map((unit) => decodeInput(bits, unit));
    const decode = interleave(
      () => {
        for (const { decoder, input } of inputs) decoder.decode(input);
      },
      this.#decode,
      options,
    );
    return { encode, decode };
  }
}

/** Sent tables are fitted to the unit at the encoder, so fitting them is part of its time. */
function refitted(bits: CellBits, { setup, sequence }: CodedUnit): Setup {
  if (bits.cell.policy !== 'sent' || setup.tables === undefined) return setup;
  const tables = trainOn(bits.cell.candidate, setup, sequence);
  return tables === undefined ? setup : { ...setup, tables };
}

function decodeInput(
  bits: CellBits,
  unit: CodedUnit,
): { decoder: Decoder; input: Parameters<Decoder['decode']>[0] } {
  const { setup, messages, coded } = unit;
  return {
    decoder: bits.cell.candidate
      .create()
      .decoder(decoderSetup(setup), { maxSymbols: messages.symbols.length }),
    input: {
      bytes: coded.bytes,
      messageCount: messages.messageEnds.length,
      ...(setup.lengths === 'link' ? { messageEndsBits: coded.messageEndsBits } : {}),
      ...(setup.lengths === 'known' ? { symbolCounts: symbolCountsOf(messages) } : {}),
    },
  };
}
