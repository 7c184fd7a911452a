import { type Candidate, parseCandidate } from '../coders/candidate.ts';
import type { Setup } from '../coders/contract.ts';
import { compareDecoded } from '../coders/verify.ts';
import { InputError } from '../errors/errors.ts';
import { oneMessage, type SymbolSequence } from '../symbols/sequence.ts';
import type { CorpusData } from './corpus-data.ts';
import type { TimedTask } from './time-sampler.ts';

/** The coder that all speeds are multiples of: codes what it is given as one message, without tables. */
export class Pacer {
  readonly encode: TimedTask;
  readonly decode: TimedTask;

  /**
   * @throws InputError where the candidate needs tables, or cannot code these symbols
   */
  constructor(id: string, test: SymbolSequence) {
    const sequence = oneMessage(test.symbols, test.alphabetSize);
    const setup = pacerSetup(test.alphabetSize);
    const coder = pacerCandidate(id).create();
    coder.check?.(setup);
    const encode = () => {
      const encoder = coder.encoder(setup);
      encoder.push(sequence);
      return encoder.finish();
    };
    const coded = encode();
    const decoder = coder.decoder(setup, { maxSymbols: sequence.symbols.length });
    const input = { bytes: coded.bytes, messageCount: 1 };
    compareDecoded(decoder.decode(input), coded, sequence);
    this.encode = { run: encode };
    this.decode = {
      run: () => {
        decoder.decode(input);
      },
    };
  }
}

function pacerSetup(alphabetSize: number): Setup {
  return { policy: 'none', alphabetSize, reset: 'message', lengths: 'sent', align: 8 };
}

/** A candidate without tables, since the time of another would depend on the plan. Throws InputError. */
function pacerCandidate(id: string): Candidate {
  const candidate = parseCandidate(id);
  if (candidate.declaration.policies.includes('none')) return candidate;
  throw new InputError(`${candidate.id} cannot be the pacer, since it needs tables`, {
    expected: 'a candidate without tables, such as deflate-huffman, deflate, brotli or fixed',
    got: `tables ${candidate.declaration.policies.join(', ')}`,
  });
}

/**
 * Whether this candidate can be the pacer of these corpora.
 * @throws InputError that names the key timing.pacer: for an unknown candidate, one that needs tables, or one that cannot code
 * the symbols of a corpus
 */
export function checkPacer(id: string, corpora: readonly CorpusData[]): void {
  try {
    const coder = pacerCandidate(id).create();
    for (const { alphabetSize } of corpora) coder.check?.(pacerSetup(alphabetSize));
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    throw new InputError(error.message, { ...error.where, key: 'timing.pacer' }, error);
  }
}
