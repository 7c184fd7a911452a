import type { Candidate } from '../coders/candidate.ts';
import type { Coded, FitClass, Setup, Tables } from '../coders/contract.ts';
import type { PiecesPrice } from '../coders/in-pieces.ts';
import { decoderSetup } from '../coders/verify.ts';
import { BitassayError, BugError, InputError, LimitError } from '../errors/errors.ts';
import type { SymbolChunk } from '../symbols/sequence.ts';
import { type Cell, unitResetOf } from './cells.ts';
import { messagesOfUnits } from './corpus-data.ts';
import { type CellBits, type CellFailure, type CellStep, placeOf } from './run-cell.ts';
import { setupBase } from './setup-base.ts';
import { StreamComparison } from './stream-compare.ts';
import type { MessageRange, StreamedData } from './stream-data.ts';
import { CodedFile } from './stream-file.ts';

/** What a cell may take, and what is known of its corpus beforehand. */
export interface StreamedCellOptions {
  /** Most bytes of a growing model; also bounds a message that must be held whole. */
  readonly modelBytes: number;
  /** Shortest code length of the test part under one member of an order's class; undefined where it was not counted. */
  fitBits(cell: Cell, order: number): number | undefined;
  /** Where coded bytes lie meanwhile; the system's folder for temporary files when absent. */
  readonly folder?: string;
  /** Takes the coded bytes of all units too, in order. */
  readonly copy?: (bytes: Uint8Array) => void;
}

/** Blocks decoded between pauses. */
const BLOCKS_A_PAUSE = 16;

/**
 * Why a cell cannot be run in pieces, as a sentence; undefined where it can, as far as can be told beforehand.
 */
function whyCellNotStreamed(cell: Cell): string | undefined {
  if (cell.candidate.create().inPieces === undefined)
    return `${cell.candidate.id} needs all data at once, and these do not fit the memory allowed; huffman and arith code data in pieces`;
  if (cell.reset.startsWith('message*'))
    return `reset ${cell.reset} makes too many units to read data in pieces for each; message, file and never are possible`;
  return undefined;
}

interface Unit extends MessageRange {
  readonly symbolCounts: Uint32Array;
  readonly symbolCount: number;
}

function unitsOf(data: StreamedData, cell: Cell): Unit[] {
  const { messageEnds } = data.shape.test;
  let from = 0;
  let symbol = 0;
  return messagesOfUnits(data.shape, cell.reset).map((messages) => {
    const symbolCounts = new Uint32Array(messages);
    const start = symbol;
    for (let i = 0; i < messages; i++) {
      symbolCounts[i] = messageEnds[from + i] - symbol;
      symbol = messageEnds[from + i];
    }
    const unit = {
      from: data.test.from + from,
      to: data.test.from + from + messages,
      symbolCounts,
      symbolCount: symbol - start,
    };
    from += messages;
    return unit;
  });
}

/** As `runCell`, for data that are read in pieces; nothing of the unit is kept. */
export async function runStreamedCell(
  cell: Cell,
  data: StreamedData,
  options: StreamedCellOptions,
  pause: (step: CellStep) => Promise<void>,
): Promise<CellBits | CellFailure> {
  const refusal = whyCellNotStreamed(cell);
  if (refusal !== undefined) return { cell, failure: refusal };
  try {
    return await new StreamedRun(cell, data, options, pause).run();
  } catch (error) {
    if (!(error instanceof BitassayError)) throw error;
    const advice = error instanceof LimitError ? ' Or allow more memory.' : '';
    return { cell, failure: `${error.message}${placeOf(error)}${advice}` };
  }
}

class StreamedRun {
  readonly #cell: Cell;
  readonly #candidate: Candidate;
  readonly #data: StreamedData;
  readonly #options: StreamedCellOptions;
  readonly #pause: (step: CellStep) => Promise<void>;

  constructor(
    cell: Cell,
    data: StreamedData,
    options: StreamedCellOptions,
    pause: (step: CellStep) => Promise<void>,
  ) {
    this.#cell = cell;
    this.#candidate = cell.candidate;
    this.#data = data;
    this.#options = options;
    this.#pause = pause;
  }

  async run(): Promise<CellBits> {
    const cell = this.#cell;
    const { shape } = this.#data;
    const { modelBytes } = this.#options;
    const setup: Setup = {
      ...setupBase(shape, cell.policy, unitResetOf(cell), cell.align),
      modelBytes,
    };
    this.#candidate.create().check?.(setup);
    const totals = {
      writtenBits: 0,
      endingBits: 0,
      paddingBits: 0,
      tableBits: 0,
      indexBits: 0,
      framingBits: 0,
      checkBits: 0,
      payloadBits: 0,
    };
    const messageBits = new Float64Array(shape.test.messageEnds.length);
    const messageIdealBits = new Float64Array(messageBits.length);
    let carriedBits = 0;
    let idealBits = 0;
    let fitOrder: number | undefined;
    let at = 0;
    const trained = await this.#trainedTables(setup);
    for (const unit of unitsOf(this.#data, cell)) {
      const { coded, price } = await this.#runUnit(unit, setup, trained);
      for (const key of Object.keys(coded.account) as (keyof typeof coded.account)[])
        totals[key] += coded.account[key];
      totals.payloadBits += coded.payloadBits;
      idealBits += price.idealBits;
      fitOrder = price.fitOrder;
      messageIdealBits.set(price.messageIdealBits, at);
      let from = 0;
      for (const end of coded.messageEndsBits) {
        messageBits[at++] = end - from;
        from = end;
      }
      carriedBits += from;
    }
    const fitBits = fitOrder === undefined ? undefined : this.#options.fitBits(cell, fitOrder);
    const fitOf: FitClass | undefined =
      fitOrder === undefined || fitBits === undefined ? undefined : { order: fitOrder };
    return {
      cell,
      totals: {
        ...totals,
        carriedBits,
        idealBits,
        ...(fitBits === undefined ? {} : { fitBits }),
      },
      ...(fitOf === undefined ? {} : { fitOf }),
      messageBits,
      messageEnds: shape.test.messageEnds,
      messageIdealBits,
      cost: {},
      mapBits: 0,
      units: [],
    };
  }

  /** Tables of the train part, for policies that have them. */
  async #trainedTables(setup: Setup): Promise<Tables | undefined> {
    if (setup.policy !== 'shipped' && setup.policy !== 'primed') return undefined;
    const { train } = this.#data;
    if (train === undefined)
      throw new BugError(`${this.#cell.id} needs a train split and there is none`);
    return this.#train(setup, train);
  }

  async #train(setup: Setup, range: MessageRange): Promise<Tables> {
    const trainer = this.#candidate.create().trainer!(setup);
    await this.#each(range, 'train', (chunk) => trainer.push(chunk));
    return trainer.finish();
  }

  async #runUnit(
    unit: Unit,
    base: Setup,
    trained: Tables | undefined,
  ): Promise<{ coded: Coded; price: PiecesPrice }> {
    const setup = await this.#fitted(
      unit,
      trained === undefined ? base : { ...base, tables: trained },
    );
    const file = new CodedFile(this.#options.folder);
    try {
      const coded = await this.#encode(unit, setup, file);
      // The decoder gets the cell's own setup: it must find a fitted table where its reset says.
      await this.#decode(unit, trained === undefined ? base : setup, coded, file);
      return { coded, price: await this.#price(unit, setup) };
    } finally {
      file.close();
    }
  }

  /**
   * The setup that codes a unit without holding it. Tables sent with each message are fitted in a pass of its own where there is
   * one message: it is the same as a unit that never resets. Several messages are gathered one by one.
   */
  async #fitted(unit: Unit, setup: Setup): Promise<Setup> {
    if (setup.policy !== 'sent') return setup;
    if (setup.reset === 'message' && unit.symbolCounts.length > 1) {
      this.#refuseLong(unit);
      return setup;
    }
    const never: Setup = { ...setup, reset: 'never' };
    if (unit.symbolCount === 0 && setup.reset === 'message') return setup;
    return { ...never, tables: await this.#train(never, unit) };
  }

  #refuseLong(unit: Unit): void {
    const longest = unit.symbolCounts.reduce((a, b) => Math.max(a, b), 0);
    // The message, gathered, beside its copy in the making and the counts of its contexts.
    const most = Math.floor(this.#options.modelBytes / 16);
    if (longest <= most) return;
    throw new InputError('a message is too long to be held while a table is fitted to it', {
      expected: `at most ${most} symbols in the memory allowed`,
      got: `${longest} symbols`,
      advice: 'Allow more memory, or take reset never.',
    });
  }

  async #encode(unit: Unit, setup: Setup, file: CodedFile): Promise<Coded> {
    const { copy } = this.#options;
    const encoder = this.#candidate.create().encoder({
      ...setup,
      sink(bytes) {
        file.write(bytes);
        copy?.(bytes);
      },
    });
    await this.#each(unit, 'encode', (chunk) => encoder.push(chunk));
    return encoder.finish();
  }

  async #decode(unit: Unit, setup: Setup, coded: Coded, file: CodedFile): Promise<void> {
    const chunks = this.#data.chunks(unit);
    const comparison = new StreamComparison(chunks, unit.symbolCounts);
    try {
      comparison.finish(
        await this.#decodeInto(unit, setup, coded, file, comparison),
        coded.messageEndsBits.at(-1) ?? 0,
      );
    } finally {
      chunks.return();
    }
  }

  /** Bits that the decoder says it read. */
  async #decodeInto(
    unit: Unit,
    setup: Setup,
    coded: Coded,
    file: CodedFile,
    comparison: StreamComparison,
  ): Promise<number> {
    const { lengths } = setup;
    const steps = this.#candidate.create().inPieces!.decode(
      {
        source: file.source(),
        messageCount: unit.symbolCounts.length,
        ...(lengths === 'link' ? { messageEndsBits: coded.messageEndsBits } : {}),
        ...(lengths === 'known' ? { symbolCounts: unit.symbolCounts } : {}),
      },
      decoderSetup(setup),
      { maxSymbols: unit.symbolCount },
      comparison,
    );
    let blocks = 0;
    let step = steps.next();
    while (step.done !== true) {
      if (++blocks % BLOCKS_A_PAUSE === 0) await this.#pause('decode');
      step = steps.next();
    }
    return step.value;
  }

  async #price(unit: Unit, setup: Setup): Promise<PiecesPrice> {
    const pricer = this.#candidate.create().inPieces!.pricer(setup);
    await this.#each(unit, 'price', (chunk) => pricer.push(chunk));
    return pricer.finish();
  }

  async #each(
    range: MessageRange,
    step: CellStep,
    take: (chunk: SymbolChunk) => void,
  ): Promise<void> {
    for (const chunk of this.#data.chunks(range)) {
      await this.#pause(step);
      take(chunk);
    }
  }
}
