import { createHash } from 'node:crypto';
import type { Candidate } from '../coders/candidate.ts';
import type { Setup } from '../coders/contract.ts';
import { trainOn } from '../coders/verify.ts';
import { InputError } from '../errors/errors.ts';
import type { CorpusData } from '../harness/corpus-data.ts';
import { setupBase } from '../harness/setup-base.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';

/** A candidate trained on the train part of a corpus, and what it codes. */
export interface ExportSubject {
  readonly candidate: Candidate;
  readonly corpus: CorpusData;
  /** Policy `shipped`, with tables, or `none`; never with a budget: an exported coder codes the messages it is given. */
  readonly setup: Setup;
  /** The messages of train and test: under fill as the coder filled them. */
  readonly train: SymbolSequence;
  readonly test?: SymbolSequence;
  /** Carried bits per symbol. */
  readonly trainRate: number;
  readonly testRate?: number;
}

interface Coding {
  readonly sequence: SymbolSequence;
  readonly rate: number;
}

function code(candidate: Candidate, setup: Setup, sequence: SymbolSequence): Coding {
  const encoder = candidate.create().encoder(setup);
  encoder.push(sequence);
  const { symbolEnds, messageEndsBits } = encoder.finish();
  const bits = messageEndsBits.length === 0 ? 0 : messageEndsBits[messageEndsBits.length - 1];
  const { length } = sequence.symbols;
  return {
    sequence: symbolEnds === undefined ? sequence : { ...sequence, messageEnds: symbolEnds },
    rate: length === 0 ? 0 : bits / length,
  };
}

/**
 * Trains a candidate for export.
 * @param align  of each message, in bits
 * @throws InputError where nothing trains, or where the candidate has no shipped tables
 */
export function exportSubject(
  candidate: Candidate,
  corpus: CorpusData,
  align: number,
): ExportSubject {
  if (corpus.train === undefined) {
    throw new InputError('there is no train part to take tables from', {
      advice: 'Split the corpus: tables are trained on its train part only.',
    });
  }
  const { policies } = candidate.declaration;
  const policy = policies.includes('none') ? 'none' : 'shipped';
  if (!policies.includes(policy)) {
    throw new InputError(`${candidate.id} has no shipped tables to export`, {
      coder: candidate.declaration.name,
      expected: 'a coder with table policy shipped',
      got: policies.join(', '),
    });
  }
  const base = setupBase(corpus, policy, 'message', align);
  const tables = trainOn(candidate, base, corpus.train);
  const filling: Setup = tables === undefined ? base : { ...base, tables };
  const train = code(candidate, filling, corpus.train);
  const test = corpus.test.symbols.length === 0 ? undefined : code(candidate, filling, corpus.test);
  const { fill: _, ...setup } = filling;
  const { record } = setup;
  // Coders of records count those, where the product counts nothing larger.
  const counted = candidate.declaration.needsRecord && record !== undefined;
  return {
    candidate,
    corpus,
    setup: counted ? { unitSymbols: record.bytes, ...setup } : setup,
    train: train.sequence,
    trainRate: train.rate,
    ...(test === undefined ? {} : { test: test.sequence, testRate: test.rate }),
  };
}

/** SHA-256 of a sequence's symbols and message ends. */
export function sequenceHash({ symbols, messageEnds }: SymbolSequence): string {
  const hash = createHash('sha256');
  for (const { buffer, byteOffset, byteLength } of [symbols, messageEnds])
    hash.update(new Uint8Array(buffer, byteOffset, byteLength));
  return hash.digest('hex');
}
