import { BitWriter } from '../bits/bit-writer.ts';
import type { FieldPlan } from '../models/field-plan.ts';
import { FieldPredictor } from '../models/field-predictor.ts';
import { codeRecord } from '../models/field-records.ts';
import { StaticFieldTables, type TokenWriter } from '../models/field-tables.ts';
import { RangeEncoder } from '../stages/range-encoder.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import type { Encoder, Lengths, Setup } from './contract.ts';
import { recordCountOf } from './fields-records.ts';
import type { FieldsSettings } from './fields-settings.ts';
import {
  adaptiveTablesFor,
  countedInRecords,
  startsAtMessages,
  tablesFor,
} from './fields-tables.ts';
import { CodeStringDraft, type DraftModel } from './fill-drafts.ts';
import { fillingEncoder } from './fill-messages.ts';
import { writeSymbolCount } from './message-frame.ts';
import { MessageLedger } from './message-ledger.ts';
import { MessagePieces, type PieceSink } from './message-pieces.ts';

/**
 * What a decoder reads after a message's last bit: phantom zeros where it knows the end; otherwise
 * anything, and the code string ends so that the decoder sees for itself where.
 */
export const continuationOf = (lengths: Lengths): 'zeros' | 'any' =>
  lengths === 'link' ? 'zeros' : 'any';

/** The plan and tables that an encoder starts with. */
function writerFor(
  settings: FieldsSettings,
  setup: Setup,
): { plan: FieldPlan; tables: TokenWriter } {
  if (setup.policy !== 'shipped') return adaptiveTablesFor(settings, setup);
  const { plan, frequencies } = tablesFor(setup, 'shipped');
  return { plan, tables: new StaticFieldTables(plan, frequencies) };
}

/** Codes messages one after another: record count, code string, padding. */
class FieldMessages implements PieceSink {
  readonly writer = new BitWriter();
  readonly ledger: MessageLedger;
  readonly #setup: Setup;
  readonly #plan: FieldPlan;
  readonly #predictor: FieldPredictor;
  readonly #tables: TokenWriter;
  readonly #stage: RangeEncoder;
  /** A record that lies across pieces. */
  readonly #open: Uint8Array;
  #openBytes = 0;

  constructor(settings: FieldsSettings, setup: Setup) {
    this.ledger = new MessageLedger(setup.align);
    this.#stage = new RangeEncoder(this.writer, settings.rangeBits);
    const { plan, tables } = writerFor(settings, setup);
    this.#setup = countedInRecords(setup, plan.layout);
    this.#plan = plan;
    this.#tables = tables;
    this.#predictor = new FieldPredictor(this.#plan);
    this.#open = new Uint8Array(this.#plan.layout.bytes);
  }

  begin(symbolCount: number): void {
    recordCountOf(symbolCount, this.#plan.layout);
    this.ledger.framingBits += writeSymbolCount(this.writer, this.#setup, symbolCount);
    if (startsAtMessages(this.#setup)) {
      this.#predictor.start();
      this.#tables.reset();
    }
    this.#stage.begin();
  }

  take(symbols: SymbolArray, from: number, to: number): void {
    const bytes = symbols as Uint8Array;
    const size = this.#open.length;
    let at = from;
    if (this.#openBytes > 0) {
      at = Math.min(to, from + size - this.#openBytes);
      this.#open.set(bytes.subarray(from, at), this.#openBytes);
      this.#openBytes += at - from;
      if (this.#openBytes < size) return;
      this.#openBytes = 0;
      this.#code(this.#open, 0);
    }
    for (; at + size <= to; at += size) this.#code(bytes, at);
    if (at === to) return;
    this.#open.set(bytes.subarray(at, to));
    this.#openBytes = to - at;
  }

  end(): void {
    const stage = this.#stage;
    stage.end(continuationOf(this.#setup.lengths));
    this.ledger.writtenBits += stage.writtenBits;
    this.ledger.endingBits += stage.endingBits;
    this.ledger.payloadBits += stage.payloadBits;
    this.ledger.close(this.writer);
  }

  #code(bytes: Uint8Array, at: number): void {
    codeRecord(this.#predictor, this.#tables, bytes, at, this.#stage);
  }
}

/** A quick encoder under `fill`; each unit is a whole number of records. */
export function fieldsFiller(settings: FieldsSettings, setup: Setup): Encoder {
  const { plan, tables } = writerFor(settings, setup);
  const { layout } = plan;
  const predictor = new FieldPredictor(plan);
  const model: DraftModel = {
    reset() {
      predictor.start();
      tables.reset();
    },
    encode(symbols, from, to, stage) {
      recordCountOf(to - from, layout);
      for (let at = from; at < to; at += layout.bytes)
        codeRecord(predictor, tables, symbols as Uint8Array, at, stage);
    },
  };
  const counted = countedInRecords(setup, layout);
  const continuation = continuationOf(setup.lengths);
  return fillingEncoder(
    counted,
    new CodeStringDraft(counted, model, settings.rangeBits, continuation),
  );
}

export function fieldsEncoder(settings: FieldsSettings, setup: Setup): Encoder {
  const messages = new FieldMessages(settings, setup);
  const pieces = new MessagePieces(messages);
  return {
    push: (chunk) => pieces.push(chunk),
    finish: () => {
      pieces.finish();
      return messages.ledger.finish(messages.writer);
    },
  };
}
