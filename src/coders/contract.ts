import type { RecordShape } from '../symbols/record.ts';
import type { SymbolChunk, SymbolSequence } from '../symbols/sequence.ts';
import type { BothEnds, EndCost, EndOperations } from './cost.ts';
import type { InPieces } from './in-pieces.ts';
import type { ParameterDeclaration, ParameterValues } from './parameters.ts';

/** Where a coder's knowledge comes from; `none` for coders that need no tables and keep no state between messages. */
export type TablePolicy = 'shipped' | 'sent' | 'learned' | 'primed' | 'none';

/** Resets that a coder declares. */
export type DeclaredReset = 'message' | 'file' | 'never';

/** When an adaptive coder forgets and `sent` tables are sent anew, as a plan says it; `message*R`: every R messages. */
export type Reset = DeclaredReset | `message*${number}`;

/**
 * The same as a coder sees it: the harness runs reset `file` as one unit a file and `message*R` as one unit each R messages,
 * so within a unit there is either a reset at each message or none.
 */
export type UnitReset = 'message' | 'never';

/**
 * What the decoder is told for free: `known` the symbol count of each message; `link` where each message ends in the
 * carried bits; `sent` neither. What is not free is written in the message and booked in `framing`.
 */
export type Lengths = 'known' | 'link' | 'sent';

/** Trained or fitted knowledge of one coder; made by its trainer, read only by the same coder. */
export interface Tables {
  /** Name of the coder that made them. */
  readonly coder: string;
}

/** Everything both ends agree on before the first bit. */
export interface Setup {
  readonly policy: TablePolicy;
  readonly alphabetSize: number;
  readonly reset: UnitReset;
  readonly lengths: Lengths;
  /** Each message's bits are padded to a multiple of this: 1, 8, 16, 32 or 64. */
  readonly align: number;
  /**
   * `shipped`, `primed`: at both ends. `sent` with reset `never`: fitted to the unit, at the encoder only, which writes
   * them in the first message. `sent` with reset `message`: absent, the encoder fits each message itself.
   */
  readonly tables?: Tables;
  /**
   * Each message is to hold as many whole units as fit into so many coded bytes, everything counted: the message ends that
   * an encoder or a trainer is given are then those of units, and the encoder decides the messages. Only where a message
   * decodes alone (reset `message`).
   */
  readonly fill?: { readonly bytes: number };
  /** Where all messages are whole units of so many symbols: the count that is written is that of units. */
  readonly unitSymbols?: number;
  /** Where the symbols are the bytes of whole records: their shape. */
  readonly record?: RecordShape;
  /** What the corpus says of how fields are coded, by field name: see symbols/field-choice.ts. */
  readonly fields?: Readonly<Record<string, string>>;
  /**
   * Only for coders that work in pieces: takes coded bytes as soon as nothing can change them, so that `Coded.bytes` is
   * empty. The array is the encoder's own and changes after the call.
   */
  readonly sink?: (bytes: Uint8Array) => void;
  /** Most bytes that a model which grows may take; absent: the coder's own bound. */
  readonly modelBytes?: number;
}

/** Exact integers, in bits, summed over messages; `payloadBits` is the one real number (docs/account.md). */
export interface IntegerAccount {
  /** Code words, or whole bytes shifted out of an arithmetic coder. */
  writtenBits: number;
  /** What ends the message's code string. */
  endingBits: number;
  /** Zeros up to `align`. */
  paddingBits: number;
  tableBits: number;
  indexBits: number;
  framingBits: number;
  checkBits: number;
}

/** What an encoder gives back. */
export interface Coded {
  /** All messages, one after another; the last byte filled up with zeros. */
  readonly bytes: Uint8Array;
  /** For each message the bit where it ends, padding included: multiples of `align`. */
  readonly messageEndsBits: Float64Array;
  /** Under `fill`: for each message the index one past its last symbol, as the encoder decided. */
  readonly symbolEnds?: Uint32Array;
  readonly account: IntegerAccount;
  /** Σ word lengths, or −log2 of the final by the initial interval of an arithmetic coder: real, not rounded. */
  readonly payloadBits: number;
}

export interface Encoder {
  /** Codes the chunk. Any cut of a sequence into chunks gives the same bytes. */
  push(chunk: SymbolChunk): void;
  /** Ends the unit. An open message is an error. The encoder cannot be used afterwards. */
  finish(): Coded;
}

/** What a decoder is given of one unit; the optional parts only under the lengths rule that grants them. */
export interface CodedInput {
  readonly bytes: Uint8Array;
  readonly messageCount: number;
  /** Only under `link`. */
  readonly messageEndsBits?: Float64Array;
  /** Only under `known`. */
  readonly symbolCounts?: Uint32Array;
  /**
   * Only from a coder that wraps this one and puts bits of its own between the messages. Called for each message in turn,
   * before anything of it is read, with the bit where the message before it ended (0 at first); gives the bit where this one
   * starts, and may, under `known`, set its entry of `symbolCounts`.
   */
  readonly startOf?: (messageIndex: number, endBits: number) => number;
}

export interface Decoded {
  readonly sequence: SymbolSequence;
  /** Bits read, padding included; equals the last message's end for an honest stream. */
  readonly bitsConsumed: number;
}

/** Bounds that keep a decoder safe on any bytes. */
export interface DecodeLimits {
  /** Most symbols of a whole unit. */
  readonly maxSymbols: number;
}

export interface Decoder {
  /** @throws CorruptStreamError, LimitError – and nothing else, whatever the bytes. */
  decode(input: CodedInput): Decoded;
}

export interface Trainer {
  push(chunk: SymbolChunk): void;
  finish(): Tables;
}

/**
 * The class of which `fit` is the best member: all order-k conditional distributions, or all distributions over blocks of n
 * symbols. For blocks the coder also says how many it saw, how many were distinct, and their plug-in entropy in bits a block,
 * which tell whether that class is estimable.
 */
export type FitClass =
  | { readonly order: number }
  | {
      readonly block: number;
      readonly blocks: number;
      readonly distinct: number;
      readonly entropyBits: number;
    };

/** What one field of the record takes. */
export interface FieldPrice {
  readonly name: string;
  readonly idealBits: number;
  /** How it was coded, as `parseFieldChoice` reads it. */
  readonly choice: string;
}

/** Code lengths by the model alone: a pass of its own, never timed, floating point allowed. */
export interface Price {
  /** −Σ log2 of the probabilities behind the code. */
  readonly idealBits: number;
  /** The same per message. */
  readonly messageIdealBits: Float64Array;
  /**
   * Shortest code length of one fixed member of the coder's class over the whole sequence, with the contexts that the
   * cell has (start contexts or run-on). Absent where the class has no best member.
   */
  readonly fit?: { readonly bits: number; readonly of: FitClass };
  /** Of coders that code a record by its fields; the bits add up to `idealBits`. */
  readonly perField?: readonly FieldPrice[];
}

/** A coder's description of itself: what the registry, screens and documents show. */
export interface Declaration {
  readonly name: string;
  /** One sentence. */
  readonly summary: string;
  readonly parameters: readonly ParameterDeclaration[];
  readonly policies: readonly TablePolicy[];
  /** Resets in which cells exist for policies other than `shipped` and `none` (these have one cell, at `message`). */
  readonly resets: readonly DeclaredReset[];
  /** The encoder must hold a whole message before its first bit. */
  readonly needsWholeMessage: boolean;
  /** A general-purpose coder shown for scale; never a pick, its bits never gated. */
  readonly reference: boolean;
  /** Codes only corpora whose symbols are the bytes of records; elsewhere it has no cell. */
  readonly needsRecord?: boolean;
  /** Largest alphabet, in symbols. */
  readonly maxAlphabetSize: number;
  /** Longest a message of n symbols can become, in words and symbols. */
  readonly worstCase: string;
  /** Memory of each end beside the message, in words and symbols. */
  readonly memory: string;
  /** Author, year, section of the method. */
  readonly source: string;
}

/**
 * A coder with all parameters set.
 *
 * Messages are coded one after another; each starts with what `lengths` does not grant (see message-frame.ts) and is
 * padded to `align`.
 */
export interface Coder {
  readonly declares: Declaration;
  /** Throws InputError when this setup cannot work (alphabet too large, policy not declared …), saying why. */
  check?(setup: Setup): void;
  /** Absent where no policy of the coder uses tables. */
  trainer?(setup: Setup): Trainer;
  /** Codes the messages it is given; `fill` is for {@link filler}, or for the wrapper of coders that have none. */
  encoder(setup: Setup): Encoder;
  /** A quick encoder under `fill`, which gives the same as trying every length; undefined where there is none. */
  filler?(setup: Setup): Encoder | undefined;
  /** Whether one more symbol never makes a message shorter, so that a fill may skip lengths. Absent: not known. */
  growsSteadily?(setup: Setup): boolean;
  decoder(setup: Setup, limits: DecodeLimits): Decoder;
  /** For data that memory cannot hold. Absent: the coder takes a unit as a whole. */
  readonly inPieces?: InPieces;
  /** Absent for coders that have no probabilities (references). `sequence` is one whole unit. */
  price?(sequence: SymbolSequence, setup: Setup): Price;
  /**
   * What each end would take on a device. Absent, or undefined under this setup: no exported form is known.
   * @param longestCodedBytes  coded bytes of the longest message
   * @param sequence           one whole unit: what is sent or grown depends on what is coded
   */
  costs?(
    setup: Setup,
    longestCodedBytes: number,
    sequence: SymbolSequence,
  ): BothEnds<EndCost> | undefined;
  /** Operations of each end, counted over one whole unit in a pass of its own; as `costs` where not known. */
  operations?(sequence: SymbolSequence, setup: Setup): EndOperations | undefined;
  /** Coded bytes that a decoder holds before its first symbol, tables sent apart; `message`: the whole message. */
  decoderHolds?(setup: Setup): number | 'message';
  /** Lines that show the tables to a person: sizes, bits, a few rows. */
  describeTables?(tables: Tables, setup: Setup): string[];
}

/** A coder before its parameters are set: what a coder's file exports and the registry lists. */
export interface CoderEntry {
  readonly declaration: Declaration;
  create(values: ParameterValues): Coder;
}
