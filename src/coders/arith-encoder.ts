import { BitWriter } from '../bits/bit-writer.ts';
import { BugError } from '../errors/errors.ts';
import { PairTree } from '../models/pair-tree.ts';
import { roundCount, writeSentTable } from '../models/sent-table.ts';
import { StaticModel } from '../models/static-model.ts';
import { compileTable } from '../models/static-table.ts';
import type { SymbolModel } from '../models/symbol-model.ts';
import { RangeEncoder } from '../stages/range-encoder.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import type { ArithSettings } from './arith-settings.ts';
import { adaptiveModelFor, startsAtMessages, tablesFor } from './arith-tables.ts';
import type { Encoder, Lengths, Setup } from './contract.ts';
import { CodeStringDraft } from './fill-drafts.ts';
import { fillingEncoder } from './fill-messages.ts';
import { writeSymbolCount } from './message-frame.ts';
import { MessageLedger } from './message-ledger.ts';
import { MessagePieces, type PieceSink, wholeMessages } from './message-pieces.ts';

/**
 * What a decoder reads after a message's last bit. Where it knows the end, phantom zeros; otherwise anything, and the
 * code string ends so that the decoder sees for itself where: that costs about a bit, less than any length would.
 */
export const continuationOf = (lengths: Lengths): 'zeros' | 'any' =>
  lengths === 'link' ? 'zeros' : 'any';

/** With a sink, bytes of an open message are handed over from this many on. */
const SETTLE_BYTES = 2 ** 16;

/** Codes messages one after another: count, table if sent, code string, padding. */
class ArithMessages implements PieceSink {
  readonly writer: BitWriter;
  readonly ledger: MessageLedger;
  readonly #settings: ArithSettings;
  readonly #setup: Setup;
  readonly #stage: RangeEncoder;
  readonly #ownPairs: PairTree | undefined;
  #model: SymbolModel | undefined;
  #tableIsDue = false;
  #settledAt = 0;

  constructor(settings: ArithSettings, setup: Setup) {
    this.#settings = settings;
    this.#setup = setup;
    this.writer = new BitWriter(1024, setup.sink);
    this.ledger = new MessageLedger(setup.align);
    this.#stage = new RangeEncoder(this.writer, settings.rangeBits);
    if (setup.policy === 'shipped') {
      this.#model = new StaticModel(tablesFor(setup, 'shipped').table);
    } else if (setup.policy !== 'sent') {
      this.#model = adaptiveModelFor(settings, setup);
    } else if (setup.reset === 'message') {
      this.#ownPairs = new PairTree(setup.alphabetSize, settings.order, settings.positions);
    } else {
      this.#tableIsDue = true;
    }
  }

  begin(symbolCount: number): void {
    this.ledger.framingBits += writeSymbolCount(this.writer, this.#setup, symbolCount);
    if (this.#tableIsDue) {
      this.#tableIsDue = false;
      this.#sendTable(tablesFor(this.#setup, 'sent').pairs);
    }
    if (startsAtMessages(this.#setup)) this.#model?.reset();
    this.#stage.begin();
    this.#settledAt = 0;
  }

  take(symbols: SymbolArray, from: number, to: number): void {
    const model = this.#model;
    if (model === undefined) throw new BugError('arith was to code without a model');
    model.encode(symbols, from, to, this.#stage);
    if (this.#setup.sink === undefined) return;
    const { shiftedBytes } = this.#stage;
    if (shiftedBytes - this.#settledAt < SETTLE_BYTES) return;
    this.#stage.settle();
    this.#settledAt = shiftedBytes;
  }

  end(): void {
    const stage = this.#stage;
    stage.end(continuationOf(this.#setup.lengths));
    this.ledger.writtenBits += stage.writtenBits;
    this.ledger.endingBits += stage.endingBits;
    this.ledger.payloadBits += stage.payloadBits;
    this.ledger.close(this.writer);
  }

  /** A whole message under a table of its own. */
  codeFitted(symbols: SymbolArray, from: number, to: number): void {
    this.ledger.framingBits += writeSymbolCount(this.writer, this.#setup, to - from);
    if (to > from) {
      const pairs = this.#ownPairs!;
      pairs.clear();
      pairs.count(symbols, from, to);
      this.#sendTable(pairs);
    }
    this.#stage.begin();
    this.#settledAt = 0;
    if (to > from) this.take(symbols, from, to);
    this.end();
  }

  /** Lets go of the model's memory. */
  release(): void {
    this.#model = undefined;
  }

  #sendTable(pairs: PairTree): void {
    const { order } = this.#settings;
    const { alphabetSize } = this.#setup;
    // With one symbol there is nothing to tell.
    if (alphabetSize > 1) {
      this.#stage.begin();
      writeSentTable(pairs.tree, order, this.#stage);
      this.#stage.end('any');
      this.ledger.tableBits += this.#stage.writtenBits + this.#stage.endingBits;
    }
    const bits = this.#settings.totalBits(alphabetSize);
    this.#model = new StaticModel(compileTable(pairs.tree, order, 'none', { bits }, roundCount));
  }
}

/** A quick encoder under `fill` for models that both ends have or grow; undefined where tables are fitted to messages. */
export function arithFiller(settings: ArithSettings, setup: Setup): Encoder | undefined {
  if (setup.policy === 'sent') return undefined;
  const model =
    setup.policy === 'shipped'
      ? new StaticModel(tablesFor(setup, 'shipped').table)
      : adaptiveModelFor(settings, setup);
  const continuation = continuationOf(setup.lengths);
  return fillingEncoder(setup, new CodeStringDraft(setup, model, settings.rangeBits, continuation));
}

export function arithEncoder(settings: ArithSettings, setup: Setup): Encoder {
  const messages = new ArithMessages(settings, setup);
  const pieces =
    setup.policy === 'sent' && setup.reset === 'message'
      ? wholeMessages((symbols, from, to) => messages.codeFitted(symbols, from, to))
      : new MessagePieces(messages);
  return {
    push: (chunk) => pieces.push(chunk),
    finish: () => {
      pieces.finish();
      messages.release();
      return messages.ledger.finish(messages.writer);
    },
  };
}
