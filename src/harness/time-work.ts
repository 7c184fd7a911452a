import type { Candidate } from '../coders/candidate.ts';
import type { CodedInput, Decoder, Encoder, Setup } from '../coders/contract.ts';
import { compareDecoded, decoderSetup, symbolCountsOf, trainOn } from '../coders/verify.ts';
import { BitassayError } from '../errors/errors.ts';
import { oneMessage, type SymbolSequence } from '../symbols/sequence.ts';
import type { Cell } from './cells.ts';
import { type CorpusData, unitsOf } from './corpus-data.ts';
import { encodeUnit, setupOf } from './run-cell.ts';
import type { TimedTask } from './time-sampler.ts';

/** What is timed at one end of a cell. */
export interface EndTasks {
  /** All messages, by an end that is ready. */
  readonly code: TimedTask;
  /** Making a new end ready: its coder, and what it builds of its tables before the first message. Absent where it needs one. */
  readonly setUp?: TimedTask;
  /** The same symbols with each unit as one message. Absent where `messagesApart` is 0. */
  readonly joined?: TimedTask;
}

/** A cell made ready for timing. */
export interface CellWork {
  readonly encode: EndTasks;
  readonly decode: EndTasks;
  /** Making the tables that the policy asks for: from the train part, or fitted to the first unit. */
  readonly buildTables?: TimedTask;
  /** Messages that the joined tasks have fewer; 0 where there are no joined tasks. */
  readonly messagesApart: number;
}

/** One unit as coded, with what both ends take to code it again. */
interface Unit {
  /** What the encoder is given. */
  readonly sequence: SymbolSequence;
  readonly setup: Setup;
  readonly input: CodedInput;
}

/**
 * Codes every unit once and verifies it: the timed runs then repeat what is known to work.
 * @param trained  the setup of all units, where it is known already
 * @param joined   each unit as one message
 * @throws what the coder throws; CorruptStreamError where a unit does not come back as it was
 */
function codeUnits(cell: Cell, corpus: CorpusData, trained?: Setup, joined = false): Unit[] {
  let shared = trained;
  return unitsOf(corpus, cell.reset).map((unit) => {
    const sequence = joined ? oneMessage(unit.symbols, unit.alphabetSize) : unit;
    const setup = shared ?? setupOf(cell, corpus, sequence);
    // Only tables that are fitted to the unit differ from unit to unit.
    if (cell.policy !== 'sent') shared = setup;
    const coded = encodeUnit(cell, setup, sequence);
    const messages =
      coded.symbolEnds === undefined ? sequence : { ...sequence, messageEnds: coded.symbolEnds };
    const input: CodedInput = {
      bytes: coded.bytes,
      messageCount: messages.messageEnds.length,
      ...(setup.lengths === 'link' ? { messageEndsBits: coded.messageEndsBits } : {}),
      ...(setup.lengths === 'known' ? { symbolCounts: symbolCountsOf(messages) } : {}),
    };
    const decoder = newDecoder(cell.candidate, setup, sequence);
    compareDecoded(decoder.decode(input), coded, messages);
    return { sequence, setup, input };
  });
}

function newDecoder(candidate: Candidate, setup: Setup, sequence: SymbolSequence): Decoder {
  return candidate.create().decoder(decoderSetup(setup), { maxSymbols: sequence.symbols.length });
}

/** Tables that are sent with a unit are fitted to it, so fitting them is part of encoding it. */
function isFitted(cell: Cell, setup: Setup): boolean {
  return cell.policy === 'sent' && setup.tables !== undefined;
}

/**
 * Encoding all units. The encoder of the first stands ready, since being ready is timed apart; what happens between units
 * (forgetting, fitting tables that are sent) is part of the work.
 */
function encodeTask(cell: Cell, units: readonly Unit[]): TimedTask {
  const coder = cell.candidate.create();
  const encode = (encoder: Encoder, sequence: SymbolSequence): void => {
    encoder.push(sequence);
    encoder.finish();
  };
  const readyEncoder = ({ setup, sequence }: Unit): Encoder => {
    if (!isFitted(cell, setup)) return coder.encoder(setup);
    return coder.encoder({ ...setup, tables: trainOn(cell.candidate, setup, sequence)! });
  };
  const first = units[0];
  if (isFitted(cell, first.setup)) {
    return {
      run: () => {
        for (const unit of units) encode(readyEncoder(unit), unit.sequence);
      },
    };
  }
  let encoder: Encoder;
  return {
    ready: () => {
      encoder = readyEncoder(first);
    },
    run: () => {
      encode(encoder, first.sequence);
      for (let i = 1; i < units.length; i++) encode(readyEncoder(units[i]), units[i].sequence);
    },
  };
}

/** Decoding all units; the decoder of the first stands ready. */
function decodeTask(cell: Cell, units: readonly Unit[]): TimedTask {
  const coder = cell.candidate.create();
  const readyDecoder = ({ setup, sequence }: Unit): Decoder =>
    coder.decoder(decoderSetup(setup), { maxSymbols: sequence.symbols.length });
  const decoder = readyDecoder(units[0]);
  return {
    run: () => {
      decoder.decode(units[0].input);
      for (let i = 1; i < units.length; i++) readyDecoder(units[i]).decode(units[i].input);
    },
  };
}

const NO_BYTES = new Uint8Array(0);

/** What a decoder is given of no messages at all. */
function emptyInput({ lengths }: Setup): CodedInput {
  return {
    bytes: NO_BYTES,
    messageCount: 0,
    ...(lengths === 'link' ? { messageEndsBits: new Float64Array(0) } : {}),
    ...(lengths === 'known' ? { symbolCounts: new Uint32Array(0) } : {}),
  };
}

/** The task, unless its first run says that it cannot be done. */
function possible(task: TimedTask): TimedTask | undefined {
  try {
    task.ready?.();
    task.run();
    return task;
  } catch (error) {
    if (error instanceof BitassayError) return undefined;
    throw error;
  }
}

/**
 * Makes a cell ready for timing: trains, codes and verifies it once, also with each unit as one message where messages can be
 * joined. They cannot under fill, where the candidate itself decides them.
 * @param corpus   what is timed, with at least one symbol in `test`
 * @param trained  the setup of all units, where it is known already; not for tables that are fitted to them
 * @throws what the coder throws; CorruptStreamError where what is decoded differs
 */
export function cellWork(cell: Cell, corpus: CorpusData, trained?: Setup): CellWork {
  const units = codeUnits(cell, corpus, trained);
  const [first] = units;
  const setUpEncoder = possible({
    run: () => {
      cell.candidate.create().encoder(first.setup).finish();
    },
  });
  const empty = emptyInput(first.setup);
  const setUpDecoder = possible({
    run: () => {
      newDecoder(cell.candidate, first.setup, first.sequence).decode(empty);
    },
  });
  const apart = corpus.fill === undefined ? corpus.test.messageEnds.length - units.length : 0;
  const joined = apart > 0 ? joinedUnits(cell, corpus, trained ?? first.setup) : undefined;
  const trainFrom = isFitted(cell, first.setup) ? first.sequence : corpus.train;
  const builds = first.setup.tables !== undefined && trainFrom !== undefined;
  const { tables: _, ...bare } = first.setup;
  return {
    encode: {
      code: encodeTask(cell, units),
      ...(setUpEncoder === undefined ? {} : { setUp: setUpEncoder }),
      ...(joined === undefined ? {} : { joined: encodeTask(cell, joined) }),
    },
    decode: {
      code: decodeTask(cell, units),
      ...(setUpDecoder === undefined ? {} : { setUp: setUpDecoder }),
      ...(joined === undefined ? {} : { joined: decodeTask(cell, joined) }),
    },
    ...(builds
      ? {
          buildTables: {
            run: () => {
              trainOn(cell.candidate, bare, trainFrom);
            },
          },
        }
      : {}),
    messagesApart: joined === undefined ? 0 : apart,
  };
}

/** Undefined where the coder cannot take so long a message. */
function joinedUnits(cell: Cell, corpus: CorpusData, setup: Setup): Unit[] | undefined {
  try {
    return codeUnits(cell, corpus, cell.policy === 'sent' ? undefined : setup, true);
  } catch (error) {
    if (error instanceof BitassayError) return undefined;
    throw error;
  }
}
