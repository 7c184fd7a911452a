import { type Candidate, parseCandidate } from '../coders/candidate.ts';
import type { Setup, TablePolicy } from '../coders/contract.ts';
import { compareDecoded, decodeUnit, trainOn } from '../coders/verify.ts';
import { BitassayError } from '../errors/errors.ts';
import { oneMessage, type SymbolArray } from '../symbols/sequence.ts';
import type { CoderLine } from './calibrate-record.ts';
import { askedOrder, type CalibrationSource } from './calibrate-source.ts';
import { judgeCoder } from './calibrate-verdicts.ts';

/** Largest alphabet whose pairs are coded as blocks. */
const MOST_FOR_BLOCKS = 256;

interface Tried {
  readonly candidate: Candidate;
  readonly policy: TablePolicy;
}

function coders(source: CalibrationSource): Tried[] {
  const order = askedOrder(source);
  const list: [string, TablePolicy][] = [
    ['fixed', 'none'],
    ['huffman', 'sent'],
  ];
  if (source.alphabetSize <= MOST_FOR_BLOCKS) list.push(['block-huffman:n=2', 'sent']);
  list.push([`arith:order=${order}`, 'learned']);
  if (order > 0) list.push(['arith:order=0', 'learned']);
  return list.map(([text, policy]) => ({ candidate: parseCandidate(text), policy }));
}

/**
 * Codes one stretch of a source, as one message whose length both ends know, decodes it and compares; then holds the
 * carried bits against what exactly these symbols contain.
 * @param pause  awaited between coders; may throw to stop
 */
export async function coderLines(
  source: CalibrationSource,
  symbols: SymbolArray,
  pause: () => Promise<void>,
): Promise<CoderLine[]> {
  const { rate } = source;
  const content = source.informationBits(symbols);
  if (rate === undefined || content === undefined) return [];
  const unit = oneMessage(symbols, source.alphabetSize);
  const lines: CoderLine[] = [];
  for (const { candidate, policy } of coders(source)) {
    await pause();
    const common = {
      source: source.name,
      symbol_count: symbols.length,
      candidate: candidate.id,
      tables: policy,
      rate: (rate.low + rate.high) / 2,
      own_content: content / symbols.length,
    };
    try {
      const base: Setup = {
        policy,
        alphabetSize: source.alphabetSize,
        reset: policy === 'none' ? 'message' : 'never',
        lengths: 'known',
        align: 1,
      };
      const coder = candidate.create();
      coder.check?.(base);
      const tables = policy === 'sent' ? trainOn(candidate, base, unit) : undefined;
      const setup = tables === undefined ? base : { ...base, tables };
      const encoder = coder.encoder(setup);
      encoder.push(unit);
      const coded = encoder.finish();
      compareDecoded(decodeUnit(candidate, setup, coded, unit), coded, unit);
      const carriedBits = coded.messageEndsBits[0];
      const ideal = coder.price?.(unit, setup).idealBits;
      lines.push({
        ...common,
        ...(ideal === undefined ? {} : { ideal: ideal / symbols.length }),
        carried: carriedBits / symbols.length,
        ...judgeCoder(carriedBits, content),
      });
    } catch (error) {
      if (!(error instanceof BitassayError)) throw error;
      lines.push({
        ...common,

        verdict: 'misses',
        verdict_text: error.message,
      });
    }
  }
  return lines;
}
