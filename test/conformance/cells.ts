/**
 * What the harness does with a coder, in small: which setups it runs, what each end is given, and
 * train, code, decode.
 */
import type {
  Coded,
  CodedInput,
  Coder,
  Declaration,
  Decoded,
  Lengths,
  Setup,
  TablePolicy,
  Tables,
  UnitReset,
} from '../../src/coders/contract.ts';
import { InputError } from '../../src/errors/errors.ts';
import {
  type SymbolChunk,
  type SymbolSequence,
  sliceMessages,
} from '../../src/symbols/sequence.ts';

/** One kind of cell: what the plan crosses, without alphabet and align. */
export interface CellKind {
  readonly policy: TablePolicy;
  readonly reset: UnitReset;
  readonly lengths: Lengths;
}

/** Every kind of cell that a coder declares. */
export function cellKinds(declaration: Declaration): CellKind[] {
  const kinds: CellKind[] = [];
  for (const policy of declaration.policies) {
    const resets = new Set<UnitReset>(
      policy === 'shipped' || policy === 'none'
        ? ['message']
        : declaration.resets.map((reset) => (reset === 'message' ? 'message' : 'never')),
    );
    for (const reset of resets)
      for (const lengths of ['known', 'link', 'sent'] as const)
        kinds.push({ policy, reset, lengths });
  }
  return kinds;
}

/** Whether the coder takes this setup; a refusal must be an InputError. */
export function accepts(coder: Coder, setup: Setup): boolean {
  if (setup.alphabetSize > coder.declares.maxAlphabetSize) return false;
  try {
    coder.check?.(setup);
    return true;
  } catch (error) {
    if (error instanceof InputError) return false;
    throw error;
  }
}

/** The sequence that a cell codes, and what both ends know. */
export interface Unit {
  readonly sequence: SymbolSequence;
  readonly encoderSetup: Setup;
  readonly decoderSetup: Setup;
}

export function train(coder: Coder, setup: Setup, chunks: readonly SymbolChunk[]): Tables {
  const trainer = coder.trainer?.(setup);
  if (trainer === undefined) throw new Error(`${coder.declares.name} has no trainer`);
  for (const chunk of chunks) trainer.push(chunk);
  return trainer.finish();
}

/**
 * The unit of a sequence: `shipped` and `primed` train on the first half of the messages and code
 * the rest; `sent` with reset `never` fits to what is coded, and only the encoder is given the fit.
 */
export function unitOf(coder: Coder, setup: Setup, whole: SymbolSequence): Unit {
  if (setup.policy === 'shipped' || setup.policy === 'primed') {
    const count = whole.messageEnds.length;
    const half = Math.floor(count / 2);
    const tables = train(coder, setup, [sliceMessages(whole, 0, half)]);
    const both = { ...setup, tables };
    return { sequence: sliceMessages(whole, half, count), encoderSetup: both, decoderSetup: both };
  }
  if (setup.policy === 'sent' && setup.reset === 'never' && coder.trainer !== undefined) {
    const tables = train(coder, setup, [whole]);
    return { sequence: whole, encoderSetup: { ...setup, tables }, decoderSetup: setup };
  }
  return { sequence: whole, encoderSetup: setup, decoderSetup: setup };
}

export function encode(coder: Coder, setup: Setup, chunks: readonly SymbolChunk[]): Coded {
  const encoder = coder.encoder(setup);
  for (const chunk of chunks) encoder.push(chunk);
  return encoder.finish();
}

function symbolCountsOf(sequence: SymbolSequence): Uint32Array {
  return sequence.messageEnds.map((end, i) => end - (i === 0 ? 0 : sequence.messageEnds[i - 1]));
}

/** What the decoder is entitled to, and nothing else. */
export function inputOf(setup: Setup, coded: Coded, sequence: SymbolSequence): CodedInput {
  return {
    bytes: coded.bytes,
    messageCount: sequence.messageEnds.length,
    ...(setup.lengths === 'link' ? { messageEndsBits: coded.messageEndsBits } : {}),
    ...(setup.lengths === 'known' ? { symbolCounts: symbolCountsOf(sequence) } : {}),
  };
}

export function decode(coder: Coder, setup: Setup, input: CodedInput, maxSymbols: number): Decoded {
  return coder.decoder(setup, { maxSymbols }).decode(input);
}
