import { createHash, type Hash } from 'node:crypto';
import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Cell } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import { toolVersion } from './environment.ts';

/** To be raised when entries change in form. */
const FORMAT = 1;

/** Layers whose code decides what a cell or a floor comes to. */
const LAYERS = [
  'statistics',
  'bits',
  'symbols',
  'corpus',
  'transforms',
  'models',
  'stages',
  'coders',
  'entropy',
  'harness',
];

/**
 * Hash of this program's own code, as it runs, and of what runs it: any change misses every entry, since a wrong figure costs
 * more than a second run.
 * @param modules  addresses of modules with further coders
 */
export function codeHash(modules: readonly string[] = []): string {
  const hash = createHash('sha256');
  const { node, v8, zlib, brotli } = process.versions;
  hash.update(JSON.stringify([FORMAT, toolVersion(), node, v8, zlib, brotli]));
  const root = dirname(dirname(fileURLToPath(import.meta.url)));
  for (const layer of LAYERS) {
    const folder = join(root, layer);
    if (!existsSync(folder)) continue;
    for (const name of readdirSync(folder, { recursive: true, encoding: 'utf8' }).sort()) {
      if (!/\.[jt]s$/.test(name) || name.endsWith('.d.ts')) continue;
      hash.update(`${layer}/${name}\0`).update(readFileSync(join(folder, name)));
    }
  }
  for (const url of modules) hash.update(`${url}\0`).update(readFileSync(new URL(url)));
  return hash.digest('hex');
}

function addSequence(hash: Hash, sequence: SymbolSequence | undefined): void {
  if (sequence === undefined) {
    hash.update('none');
    return;
  }
  const { alphabetSize, symbols, messageEnds } = sequence;
  hash.update(
    JSON.stringify([alphabetSize, symbols.length, symbols.BYTES_PER_ELEMENT, messageEnds.length]),
  );
  hash.update(symbols).update(messageEnds);
}

/** Keys of cached figures: hashes of all that the figures depend on. The same data are hashed once. */
export class CacheKeys {
  readonly #code: string;
  readonly #coded = new Map<string, string>();
  readonly #trained = new Map<string, string>();

  constructor(code: string) {
    this.#code = code;
  }

  /** Of what is coded: symbols, messages, files, and what both ends know of them. */
  #codedHash(corpus: CorpusData): string {
    let found = this.#coded.get(corpus.key);
    if (found === undefined) {
      // All there is but what names the data, what trains, and figures of figures: a key that is added later counts.
      const { name, key, vary, sha256, symbolsAs, messagesAs, sourceBytes, ...known } = corpus;
      const { train, test, repeated, testFiles, sentMap, ...facts } = known;
      const hash = createHash('sha256');
      const fileEnds = testFiles.map(({ messageEnd }) => messageEnd);
      hash.update(JSON.stringify([facts, sentMap?.bits, fileEnds]));
      if (sentMap !== undefined) hash.update(sentMap.bytes);
      addSequence(hash, test);
      found = hash.digest('hex');
      this.#coded.set(corpus.key, found);
    }
    return found;
  }

  #trainedHash(corpus: CorpusData): string {
    let found = this.#trained.get(corpus.key);
    if (found === undefined) {
      const hash = createHash('sha256');
      addSequence(hash, corpus.train);
      found = hash.digest('hex');
      this.#trained.set(corpus.key, found);
    }
    return found;
  }

  /** Of what a cell comes to, or, by another `kind`, of other figures about it. */
  ofCell(kind: string, cell: Cell, corpus: CorpusData): string {
    const { candidate, policy, reset, align } = cell;
    const isTrained = policy === 'shipped' || policy === 'primed';
    return this.#key([
      kind,
      candidate.id,
      policy,
      reset,
      align,
      this.#codedHash(corpus),
      isTrained ? this.#trainedHash(corpus) : '',
    ]);
  }

  ofFloors(corpus: CorpusData): string {
    return this.#key(['floors', this.#codedHash(corpus)]);
  }

  #key(parts: readonly unknown[]): string {
    return createHash('sha256')
      .update(JSON.stringify([this.#code, ...parts]))
      .digest('hex');
  }
}
