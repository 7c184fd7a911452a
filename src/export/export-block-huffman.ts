import { ngramSpace } from '../coders/block-huffman-ngrams.ts';
import { BlockFit, blockTables } from '../coders/block-huffman-tables.ts';
import type { Candidate } from '../coders/candidate.ts';
import type { Setup } from '../coders/contract.ts';
import { symbolWidth } from '../coders/fixed.ts';
import { InputError } from '../errors/errors.ts';
import { type ExportedCoder, elementBytesFor, messageBuffers } from './exporter.ts';
import { BITS_IN, BITS_OUT, frameConstants, messageIn, messageOut } from './frame-program.ts';
import { parseProgram } from './language-parser.ts';
import {
  canonicalOrder,
  longestWordBits,
  prefixConstants,
  prefixIn,
  prefixInTables,
  prefixOut,
  prefixOutTables,
  prefixPlaceIn,
  prefixPlaceTables,
} from './prefix-program.ts';
import { fillsItsType } from './symbol-program.ts';

const FIND = `
// The place of a block in the rising list of those trained, or BLOCKS.
fn find_block(key) {
  let from = 0;
  let to = BLOCKS;
  while (from < to) {
    let middle = (from + to) >> 1;
    if (block[middle] < key) {
      from = middle + 1;
    } else {
      to = middle;
    }
  }
  if (from < BLOCKS && block[from] == key) {
    return from;
  }
  return BLOCKS;
}
`;

const CHECK = `
    if (symbols[i] >= ALPHABET) {
      status = SYMBOL;
      return 0;
    }`;

/** Blocks from the first symbol on; what is left of the last by a code of its own. */
function symbolsOut(checks: boolean, escapes: boolean): string {
  const raw = `if (place == BLOCKS) {
      let j = at;
      while (j < at + BLOCK) {
        put_bits(symbols[j], SYMBOL_BITS);
        j = j + 1;
      }
    }`;
  return `
fn encode_symbols(count) {${
    checks
      ? `
  let i = 0;
  while (i < count) {${CHECK}
    i = i + 1;
  }`
      : ''
  }
  let at = 0;
  while (count - at >= BLOCK && status == OK) {
    let key = 0;
    let k = at;
    while (k < at + BLOCK) {
      key = key * ALPHABET + symbols[k];
      k = k + 1;
    }
    let place = find_block(key);
    block_put_word(place);
    ${escapes ? raw : ''}
    at = at + BLOCK;
  }
  while (at < count && status == OK) {
    tail_put_word(symbols[at]);
    at = at + 1;
  }
}
`;
}

function symbolsIn(escapes: boolean): string {
  const known = `let key = block[place];
      let k = at + BLOCK;
      while (k > at) {
        k = k - 1;
        symbols[k] = key % ALPHABET;
        key = key / ALPHABET;
      }`;
  const raw = `let j = at;
      while (j < at + BLOCK) {
        let symbol = get_bits(SYMBOL_BITS);
        if (symbol >= ALPHABET) {
          status = CORRUPT;
          return 0;
        }
        symbols[j] = symbol;
        j = j + 1;
      }`;
  const cases = escapes
    ? `if (place == ESCAPE) {
      ${raw}
    } else {
      ${known}
    }`
    : known;
  return `
fn decode_symbols(count) {
  let at = 0;
  while (count - at >= BLOCK && status == OK) {
    let place = block_get_word();
    if (status != OK) {
      return 0;
    }
    ${cases}
    at = at + BLOCK;
  }
  while (at < count && status == OK) {
    symbols[at] = tail_get_word();
    at = at + 1;
  }
}
`;
}

/** `block-huffman` with shipped tables. */
export function exportBlockHuffman(candidate: Candidate, setup: Setup): ExportedCoder {
  const n = Number(candidate.values['n']);
  const { alphabetSize } = setup;
  const space = ngramSpace(alphabetSize, n);
  if (space > 2 ** 32) {
    throw new InputError(`blocks of ${n} symbols of ${alphabetSize} are more than 32 bits number`, {
      key: 'n',
      expected: `alphabet^n of at most 2^32`,
      got: String(space),
    });
  }
  const fit = new BlockFit(Number(candidate.values['maxbits']));
  fit.fitTables(blockTables(setup, n), 'shipped');
  const { blocks, escape: escapeEntry } = fit;
  const { table: tail } = fit.tail;
  const escapes = escapeEntry >= 0;
  const blockCount = escapes ? blocks.count - 1 : blocks.count;
  const keys = Array.from(blocks.symbols.subarray(0, blockCount));
  const order = canonicalOrder(blocks);
  const keyBytes = elementBytesFor(keys.reduce((most, key) => Math.max(most, key), 0));
  const symbolBits = symbolWidth(alphabetSize);
  const constants = new Map<string, number>([
    ...frameConstants(setup),
    ...prefixConstants(blocks, 'block_'),
    ...prefixConstants(tail, 'tail_'),
    ['ALPHABET', alphabetSize],
    ['BLOCK', n],
    ['BLOCKS', blockCount],
    ['ESCAPE', escapes ? order.indexOf(escapeEntry) : 0],
    ['SYMBOL_BITS', symbolBits],
  ]);
  const buffers = messageBuffers(alphabetSize);
  const longestBlock = longestWordBits(blocks) + (escapes ? n * symbolBits : 0);
  const blockTable = (values: readonly number[], comment: string) => ({
    name: 'block',
    elementBytes: keyBytes,
    // An array needs an element, and a table of the escape alone has no block.
    values: values.length === 0 ? [0] : values,
    comment,
  });
  return {
    encoder: {
      program: parseProgram(
        BITS_OUT,
        FIND,
        prefixOut(blocks, 'block_'),
        prefixOut(tail, 'tail_'),
        symbolsOut(!fillsItsType(alphabetSize), escapes),
        messageOut(setup),
      ),
      entry: 'encode_message',
      entryGives: false,
      constants,
      tables: [
        blockTable(keys, 'Blocks that were trained, symbols as digits, rising.'),
        ...prefixOutTables(blocks, 'block_'),
        ...prefixOutTables(tail, 'tail_'),
      ],
      buffers: buffers.encoder,
    },
    decoder: {
      program: parseProgram(
        BITS_IN,
        prefixPlaceIn(blocks, 'block_'),
        prefixIn(tail, 'tail_'),
        symbolsIn(escapes),
        messageIn(setup),
      ),
      entry: 'decode_message',
      entryGives: setup.lengths !== 'known',
      constants,
      tables: [
        blockTable(
          order.map((i) => (i === escapeEntry ? 0 : keys[i])),
          'Blocks by the canonical order of their words, symbols as digits.',
        ),
        ...prefixPlaceTables(blocks, 'block_'),
        ...prefixInTables(tail, 'tail_'),
      ],
      buffers: buffers.decoder,
    },
    longestSymbolBits: Math.max(Math.ceil(longestBlock / n), longestWordBits(tail)),
    endingBits: 0,
    unseen: escapes
      ? `A block that was never seen in training is an escape of ${blocks.lengths[escapeEntry]} bits and its symbols as they are.`
      : 'Every possible block was seen in training and has a word.',
  };
}
