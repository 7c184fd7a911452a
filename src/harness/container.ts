import { crc32 } from '../bits/crc32.ts';
import { type Candidate, parseCandidate } from '../coders/candidate.ts';
import type { Setup, TablePolicy } from '../coders/contract.ts';
import { CorruptStreamError, InputError, LimitError, NotYetError } from '../errors/errors.ts';
import { oneMessage } from '../symbols/sequence.ts';
import {
  type ContainerHeader,
  readContainerHeader,
  refuseCut,
  writeContainerHeader,
} from './container-header.ts';
import { alphabetSizeOf, restoreContent, takeContent, takerOf } from './container-symbols.ts';

/**
 * One file, coded by one candidate, in a file that says everything its decoder must know.
 *
 * The content is one message under reset `message`, lengths `link`, align 8; version 1 of the format fixes that. `link`,
 * because the file itself tells where the coded bytes end: under `known` or `sent` a coder that needs that end would pay
 * for it again. What `link` does not grant, the symbol count, stands in the message and not in the header. The byte count
 * of the content is no second payment for it: it is what a reader's limit is held against before anything is decoded.
 */

/** What {@link packContainer} takes. */
export interface PackRequest {
  readonly candidate: Candidate;
  /** As `parseSymbolTaker` reads it. */
  readonly symbolsAs: string;
  readonly policy: TablePolicy;
  readonly content: Uint8Array;
  /** Name of the content in messages. */
  readonly file: string;
}

export interface PackedContainer {
  /** Header and coded bytes. */
  readonly bytes: Uint8Array;
  readonly header: ContainerHeader;
  readonly headerBytes: number;
  readonly symbolCount: number;
}

/** Most content that is decoded unless the caller allows more, in bytes: what one file can be read at once. */
export const USUAL_CONTENT_LIMIT_BYTES = 2 ** 31;

/** Symbols of a message are counted in 32 bits. */
const MOST_SYMBOLS = 2 ** 32 - 1;

/** The policies that a container can hold, most preferred first. */
const CONTAINED_POLICIES: readonly TablePolicy[] = ['none', 'learned', 'sent'];

function refusePolicy(candidate: Candidate, policy: TablePolicy): void {
  const declared = candidate.declaration.policies;
  if (!declared.includes(policy)) {
    throw new InputError(`${candidate.id} cannot be coded with ${policy} tables`, {
      coder: candidate.declaration.name,
      expected: `tables ${declared.join(', ')}`,
      got: policy,
    });
  }
  if (!CONTAINED_POLICIES.includes(policy)) {
    throw new NotYetError(`containers with ${policy} tables are not built yet`, {
      coder: candidate.declaration.name,
      expected: 'tables sent or learned',
      got: policy,
      advice: 'They will come together with the export of tables, whose id the container names.',
    });
  }
}

/**
 * The policy that a candidate is coded with when nobody chose one: none where it needs no tables, else learned, else sent.
 * @throws NotYetError when it can only be shipped or primed
 */
export function usualPolicy(candidate: Candidate): TablePolicy {
  const declared = candidate.declaration.policies;
  const policy = CONTAINED_POLICIES.find((p) => declared.includes(p)) ?? declared[0];
  refusePolicy(candidate, policy);
  return policy;
}

function setupOf(candidate: Candidate, policy: TablePolicy, alphabetSize: number): Setup {
  const largest = candidate.declaration.maxAlphabetSize;
  if (alphabetSize > largest) {
    throw new InputError(`${candidate.id} cannot code so many different symbols`, {
      coder: candidate.declaration.name,
      expected: `an alphabet of at most ${largest}`,
      got: `${alphabetSize}`,
      advice: 'Take symbols of fewer bits, or another coder.',
    });
  }
  return { policy, alphabetSize, reset: 'message', lengths: 'link', align: 8 };
}

/**
 * Codes `content` and puts a header before it.
 * @throws InputError when the candidate, the policy or the content does not go with the symbols; NotYetError for `shipped` and
 *   `primed`; LimitError for more than 2^32 − 1 symbols
 */
export function packContainer(request: PackRequest): PackedContainer {
  const { candidate, policy, content } = request;
  refusePolicy(candidate, policy);
  const taker = takerOf(request.symbolsAs);
  if (content.length * taker.maxSymbolsPerByte > MOST_SYMBOLS) {
    throw new LimitError(`${request.file}: too many symbols for one message`, {
      file: request.file,
      expected: `at most ${MOST_SYMBOLS}`,
      got: `up to ${content.length * taker.maxSymbolsPerByte}`,
      advice: 'Cut the file into parts, or take larger symbols.',
    });
  }
  const { symbols, alphabetSize, map } = takeContent(taker, content, request.file);
  const setup = setupOf(candidate, policy, alphabetSize);
  const coder = candidate.create();
  coder.check?.(setup);
  const encoder = coder.encoder(setup);
  encoder.push(oneMessage(symbols, alphabetSize));
  const coded = encoder.finish().bytes;
  const header: ContainerHeader = {
    candidate: candidate.id,
    policy,
    symbolsAs: taker.text,
    ...(map === undefined ? {} : { map }),
    contentBytes: content.length,
    contentCrc32: crc32(content),
    codedBytes: coded.length,
    codedCrc32: crc32(coded),
  };
  const headerBytes = writeContainerHeader(header);
  const bytes = new Uint8Array(headerBytes.length + coded.length);
  bytes.set(headerBytes);
  bytes.set(coded, headerBytes.length);
  return { bytes, header, headerBytes: headerBytes.length, symbolCount: symbols.length };
}

/**
 * The content of a container. Everything that the header claims is checked before memory is taken for it.
 * @param maxBytes  most content that may be decoded, in bytes
 * @throws InputError for another kind of file, another version, or a candidate that this program does not have; LimitError for
 *   more content than `maxBytes`; CorruptStreamError for a container that was cut, altered or lengthened
 */
export function unpackContainer(
  bytes: Uint8Array,
  maxBytes = USUAL_CONTENT_LIMIT_BYTES,
): { content: Uint8Array; header: ContainerHeader } {
  const { header, codedFrom } = readContainerHeader(bytes);
  const candidate = parseCandidate(header.candidate);
  refusePolicy(candidate, header.policy);
  const taker = takerOf(header.symbolsAs);
  const alphabetSize = alphabetSizeOf(taker, header.map);
  checkLengths(header, bytes.length - codedFrom, maxBytes);
  const coded = bytes.subarray(codedFrom);
  if (crc32(coded) !== header.codedCrc32) refuseAltered('the coded bytes');

  const setup = setupOf(candidate, header.policy, alphabetSize);
  const coder = candidate.create();
  coder.check?.(setup);
  const maxSymbols = Math.min(
    MOST_SYMBOLS,
    Math.floor(header.contentBytes * taker.maxSymbolsPerByte),
  );
  const { sequence } = coder.decoder(setup, { maxSymbols }).decode({
    bytes: coded,
    messageCount: 1,
    messageEndsBits: Float64Array.of(coded.length * 8),
  });
  const content = restoreContent(taker, sequence.symbols, header.map);
  if (content.length !== header.contentBytes || crc32(content) !== header.contentCrc32) {
    refuseAltered('the decoded content');
  }
  return { content, header };
}

function checkLengths(header: ContainerHeader, codedBytes: number, maxBytes: number): void {
  if (header.contentBytes > maxBytes) {
    throw new LimitError('the container holds more content than allowed', {
      expected: `at most ${maxBytes} bytes`,
      got: `${header.contentBytes} bytes`,
      advice: 'If you trust it, allow more with --limit.',
    });
  }
  if (codedBytes < header.codedBytes) refuseCut(header.codedBytes, codedBytes);
  if (codedBytes > header.codedBytes) {
    throw new CorruptStreamError('there are bytes after the end of the container', {
      expected: `${header.codedBytes} coded bytes`,
      got: `${codedBytes} coded bytes`,
      advice: 'Something was added to the file; take an unharmed copy.',
    });
  }
}

function refuseAltered(what: string): never {
  throw new CorruptStreamError(`${what} of the container do not match their checksum`, {
    advice: 'The file was altered after it was written; take an unharmed copy.',
  });
}
