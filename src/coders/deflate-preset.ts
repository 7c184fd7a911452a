import { PromiseError } from '../errors/errors.ts';
import type { SymbolChunk } from '../symbols/sequence.ts';
import type { CoderEntry, Declaration, Setup, Tables, Trainer } from './contract.ts';
import { deflateLevel } from './deflate.ts';
import { referenceCoder, referenceTraits } from './reference.ts';
import { deflateMethod } from './reference-library.ts';
import { bytesPerSymbol, symbolsToBytes } from './reference-symbols.ts';

/** Deflate cannot refer further back than this, in bytes. */
const WINDOW_BYTES = 2 ** 15;

/** Bytes that both ends hold before a message begins; a repeat of the last ones costs least. */
export interface PresetTables extends Tables {
  readonly coder: 'deflate-preset';
  readonly dictionary: Uint8Array;
}

const declaration: Declaration = {
  ...referenceTraits,
  name: 'deflate-preset',
  summary:
    'Deflate that may repeat pieces of a dictionary held at both ends: the last 32 KiB of the train split.',
  parameters: [deflateLevel],
  policies: ['shipped'],
  worstCase: 'n bytes, 5 for each block of about 16 KiB, and up to 2 more',
  memory:
    'the dictionary, up to 32 KiB, at both ends; the whole message; about 260 KiB to encode, 40 KiB to decode',
  source:
    'Deutsch 1996, RFC 1951; zlib’s preset dictionary (Deutsch and Gailly 1996, RFC 1950 §2.2)',
};

/** Keeps the last 32 KiB of what is pushed: the train split runs in time, so the newest messages are the likeliest. */
function dictionaryTrainer(setup: Setup): Trainer {
  const width = bytesPerSymbol(setup.alphabetSize);
  let kept = new Uint8Array(0);
  return {
    push(chunk: SymbolChunk) {
      const { symbols } = chunk;
      const from = Math.max(0, symbols.length - WINDOW_BYTES / width);
      const latest = symbolsToBytes(symbols, from, symbols.length, width);
      const before = kept.subarray(Math.max(0, kept.length + latest.length - WINDOW_BYTES));
      const joined = new Uint8Array(before.length + latest.length);
      joined.set(before);
      joined.set(latest, before.length);
      kept = joined;
    },
    finish(): PresetTables {
      return { coder: 'deflate-preset', dictionary: kept };
    },
  };
}

function dictionaryOf(tables: Tables | undefined): Uint8Array {
  if (tables?.coder !== declaration.name) {
    throw new PromiseError('deflate-preset was not given its dictionary', {
      expected: 'tables of deflate-preset',
      got: tables === undefined ? 'none' : `tables of ${tables.coder}`,
    });
  }
  return (tables as PresetTables).dictionary;
}

/** A reference: what a dictionary shipped with the product buys short messages. */
export const deflatePreset: CoderEntry = {
  declaration,
  create: (values) => ({
    ...referenceCoder(declaration, (setup) =>
      deflateMethod({ level: Number(values['level']) }, dictionaryOf(setup.tables)),
    ),
    trainer: dictionaryTrainer,
    describeTables: (tables) => [
      `dictionary: ${dictionaryOf(tables).length} bytes, the newest of the train split last`,
    ],
  }),
};
