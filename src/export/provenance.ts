import { createHash } from 'node:crypto';
import { toolVersion } from '../harness/environment.ts';
import { type ExportSubject, sequenceHash } from './export-subject.ts';
import type { ExportedCoder } from './exporter.ts';

/** Where tables come from, as facts; a JSON export carries them as they are. */
export interface Provenance {
  readonly tool: string;
  readonly candidate: string;
  /** First eight hexadecimal digits of the SHA-256 of all tables and constants. */
  readonly table_id: string;
  readonly corpus: string;
  readonly corpus_sha256: string;
  readonly train_sha256: string;
  readonly train_symbols: number;
  /** Carried bits per symbol, everything counted. */
  readonly train_rate: number;
  readonly test_rate?: number;
  readonly symbols_as: string;
  readonly messages_as: string;
  readonly alphabet_size: number;
  readonly lengths: string;
  readonly align_bits: number;
  readonly unit_symbols: number;
}

function tableId(coder: ExportedCoder): string {
  const hash = createHash('sha256');
  for (const { tables, constants } of [coder.encoder, coder.decoder]) {
    for (const { name, values } of tables) hash.update(`${name}:${Array.from(values!).join(',')};`);
    for (const [name, value] of constants) hash.update(`${name}=${value};`);
  }
  return hash.digest('hex').slice(0, 8);
}

export function provenanceOf(coder: ExportedCoder, subject: ExportSubject): Provenance {
  const { candidate, corpus, setup, train, trainRate, testRate } = subject;
  return {
    tool: `bitassay ${toolVersion()}`,
    candidate: candidate.id,
    table_id: tableId(coder),
    corpus: corpus.name,
    corpus_sha256: corpus.sha256,
    train_sha256: sequenceHash(train),
    train_symbols: train.symbols.length,
    train_rate: trainRate,
    ...(testRate === undefined ? {} : { test_rate: testRate }),
    symbols_as: corpus.symbolsAs,
    messages_as: corpus.messagesAs,
    alphabet_size: setup.alphabetSize,
    lengths: setup.lengths,
    align_bits: setup.align,
    unit_symbols: setup.unitSymbols ?? 1,
  };
}

const LENGTHS_WORDS: Readonly<Record<string, string>> = {
  known: 'the decoder is told the number of symbols; no count is written',
  link: 'the decoder is told the length of the message in bytes; its count stands in it',
  sent: 'the message says its own count and end',
};

/** The text at the head of an exported file: what this is, what it was trained on, and what to beware of. */
export function provenanceLines(facts: Provenance, coder: ExportedCoder): string[] {
  const test =
    facts.test_rate === undefined ? '' : `, ${facts.test_rate.toFixed(4)} on the test part`;
  return [
    `${facts.candidate}, tables ${facts.table_id}, exported by ${facts.tool}.`,
    '',
    `Trained on ${facts.train_symbols} symbols of corpus ${facts.corpus} (train part only),`,
    `SHA-256 of the corpus ${facts.corpus_sha256},`,
    `of the train part ${facts.train_sha256}.`,
    `Bits per symbol, everything counted: ${facts.train_rate.toFixed(4)} on the train part${test}.`,
    `Symbols: ${facts.symbols_as}, alphabet ${facts.alphabet_size}. Messages: ${facts.messages_as}, padded to ${facts.align_bits} bits.`,
    `Lengths: ${LENGTHS_WORDS[facts.lengths]}.`,
    '',
    coder.unseen,
    `Messages do not name their tables. A decoder with other tables gives other symbols, or an error, and`,
    `need not notice. Before new tables ship, let the product carry the table id ${facts.table_id} in a header of`,
    'its own, and keep old decoders as long as old messages can arrive.',
    '',
    'Cautions. The decoder is bounded in output and time, and refuses what no encoder writes, but cannot see',
    'every damage: give messages a check of their own. If messages are encrypted after coding, their lengths still tell of their',
    'content. Tables carry traces of the data they were trained on. None of this is certified for',
    'anything: your own standards and their reviewers decide.',
  ];
}
