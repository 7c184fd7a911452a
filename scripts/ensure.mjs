/**
 * Makes a bare clone ready: the right Node, the packages of the lock file, an up-to-date dist/.
 * Each step is skipped when its stamp says that nothing has changed, so every script may call this first.
 */
import { spawnSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import {
  chmodSync,
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  realpathSync,
  renameSync,
  rmSync,
  statSync,
  writeFileSync,
} from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';

export const root = dirname(dirname(fileURLToPath(import.meta.url)));

const modules = join(root, 'node_modules');
const installStamp = join(modules, '.bitassay-installed');
const dist = join(root, 'dist');
const buildStampName = '.built-from';

/** @param {string} path */
const readJson = (path) => JSON.parse(readFileSync(path, 'utf8'));

/** A failure that the reader can act on: printed without a stack. */
export class SetupError extends Error {}

function checkNode() {
  const wanted = readJson(join(root, 'package.json')).engines.node;
  const least = Number(/\d+/.exec(wanted)?.[0]);
  const have = Number(process.versions.node.split('.')[0]);
  if (have < least) {
    throw new SetupError(
      `bitassay needs Node.js ${least} or newer; this is ${process.versions.node}. Install Node.js ${least} and run the command again.`,
    );
  }
}

/** What is installed differs by lock file and, for the native parts, by the kind of machine. */
function installKey() {
  const hash = createHash('sha256').update(readFileSync(join(root, 'package-lock.json')));
  return `${hash.digest('hex')} ${process.platform}-${process.arch}`;
}

/** True where somebody ran npm by hand: npm's own note is newer than the lock, and all direct packages fit. */
function installedByHand() {
  const note = join(modules, '.package-lock.json');
  if (!existsSync(note)) return false;
  if (statSync(note).mtimeMs < statSync(join(root, 'package-lock.json')).mtimeMs) return false;
  const { dependencies, devDependencies } = readJson(join(root, 'package.json'));
  return Object.entries({ ...dependencies, ...devDependencies }).every(([name, version]) => {
    const manifest = join(modules, name, 'package.json');
    return existsSync(manifest) && readJson(manifest).version === version;
  });
}

/** @param {string[]} args */
function npm(args) {
  // Under `npm run` the very npm that was started is known by path; it also works where npm is a .cmd file.
  const own = process.env['npm_execpath'];
  const [command, first] = own?.endsWith('.js') ? [process.execPath, [own]] : ['npm', []];
  return spawnSync(command, [...first, ...args], {
    cwd: root,
    // npm's talk goes to stderr: stdout belongs to the command that follows.
    stdio: ['ignore', 2, 2],
    shell: command === 'npm' && process.platform === 'win32',
  });
}

export function ensureInstalled() {
  checkNode();
  const key = installKey();
  if (existsSync(installStamp) && readFileSync(installStamp, 'utf8') === key) return;
  if (!installedByHand()) {
    console.error('Installing the packages of package-lock.json (once) …');
    // No package of the lock file has an install script; none that a later one brings shall run unseen.
    const done = npm(['ci', '--ignore-scripts', '--loglevel=error']);
    if (done.error || done.status !== 0) {
      throw new SetupError(
        `npm ci failed (${done.error?.message ?? `exit code ${done.status}`}): its message stands above. Without network, fill npm's cache first.`,
      );
    }
  }
  writeFileSync(installStamp, key);
}

/** Everything that dist/ depends on, by content: times lie after a checkout. */
function buildKey() {
  const hash = createHash('sha256');
  const sources = readdirSync(join(root, 'src'), { recursive: true, withFileTypes: true })
    .filter((entry) => entry.isFile())
    .map((entry) => join(entry.parentPath, entry.name))
    .sort();
  const settings = ['tsconfig.json', 'tsconfig.build.json', 'package-lock.json'];
  for (const path of [...sources, ...settings.map((name) => join(root, name))]) {
    const content = readFileSync(path);
    hash.update(`${path.slice(root.length)} ${content.length}\n`).update(content);
  }
  return hash.digest('hex');
}

/** @param {string[]} args */
export function tsc(args) {
  const compiler = join(modules, 'typescript', 'bin', 'tsc');
  return spawnSync(process.execPath, [compiler, ...args], { cwd: root, stdio: ['ignore', 2, 2] });
}

/**
 * Puts a finished folder in the place of another, which goes. Two runs may meet here: the loser tries again.
 * @param {string} fresh
 * @param {string} place
 */
export function swapIn(fresh, place) {
  for (let tries = 1; ; tries++) {
    try {
      if (existsSync(place)) renameSync(place, `${fresh}-stale-${tries}`);
      renameSync(fresh, place);
      break;
    } catch (error) {
      if (tries === 5) throw error;
    }
  }
}

/**
 * Builds beside dist/ and swaps the finished folder in: files whose source has gone disappear, and a run that
 * goes on meanwhile never reads half a file. A failed build leaves dist/ as it was.
 */
export function build() {
  const key = buildKey();
  mkdirSync(modules, { recursive: true });
  const workshop = mkdtempSync(join(modules, '.bitassay-build-'));
  try {
    const fresh = join(workshop, 'fresh');
    const done = tsc(['-p', 'tsconfig.build.json', '--outDir', fresh]);
    if (done.status !== 0) throw new SetupError('The build failed: the compiler says why above.');
    const program = join(fresh, 'cli', 'main.js');
    if (existsSync(program)) chmodSync(program, 0o755);
    writeFileSync(join(fresh, buildStampName), key);
    swapIn(fresh, dist);
  } finally {
    rmSync(workshop, { recursive: true, force: true });
  }
}

export function ensureBuilt() {
  const stamp = join(dist, buildStampName);
  if (existsSync(stamp) && readFileSync(stamp, 'utf8') === buildKey()) return;
  build();
}

export function ensure() {
  ensureInstalled();
  ensureBuilt();
}

/**
 * Runs a script's body; a SetupError becomes its message and exit code 4 (the environment), as in the program.
 * @param {() => number | void | Promise<number | void>} body
 */
export async function main(body) {
  try {
    process.exitCode = (await body()) ?? 0;
  } catch (error) {
    if (!(error instanceof SetupError)) throw error;
    console.error(error.message);
    process.exitCode = 4;
  }
}

/**
 * Runs a Node program in the foreground and returns its exit code.
 * @param {string[]} args
 * @param {NodeJS.ProcessEnv} [env]
 */
export function runNode(args, env = process.env) {
  const done = spawnSync(process.execPath, args, { cwd: root, stdio: 'inherit', env });
  if (done.error) throw done.error;
  return done.status ?? (done.signal === 'SIGINT' ? 130 : 1);
}

/**
 * True for the script that was started, false for one that is imported.
 * @param {string} url
 */
export function isStarted(url) {
  const started = process.argv[1];
  // Node gives import.meta.url without symbolic links, but the argument as it was typed.
  if (started === undefined || !existsSync(started)) return false;
  return url === pathToFileURL(realpathSync(started)).href;
}

if (isStarted(import.meta.url)) await main(ensure);
