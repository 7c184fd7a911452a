import { spawnSync } from 'node:child_process';
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import type { Setup } from '../coders/contract.ts';
import { cDriver } from './c-driver.ts';
import { elementBytesFor } from './exporter.ts';
import { type Answer, ParityError, type Task, type TaskRunner } from './prove.ts';

/** What the exported files must compile with, and without a word. */
export const C_FLAGS = [
  '-std=c99',
  '-Wall',
  '-Wextra',
  '-Wconversion',
  '-Wshadow',
  '-Werror',
  '-pedantic',
];

/** Found at run time: steps outside arrays, undefined arithmetic. */
const SANITIZERS = ['-O1', '-g', '-fsanitize=address,undefined', '-fno-sanitize-recover=all'];

/** Whether there is such a compiler. */
export function hasCompiler(compiler = 'gcc'): boolean {
  return spawnSync(compiler, ['--version']).status === 0;
}

/** Runs a tool that must succeed. @throws ParityError with what it said */
function must(command: string, args: readonly string[], folder: string): string {
  const done = spawnSync(command, args, { cwd: folder, encoding: 'utf8' });
  if (done.error) throw new ParityError(`${command} cannot be run: ${done.error.message}`);
  if (done.status !== 0) throw new ParityError(`${command} fails:\n${done.stderr}${done.stdout}`);
  return done.stdout;
}

/** A program made of exported files, built with or without sanitizers. */
export function buildC(
  files: ReadonlyMap<string, string>,
  name: string,
  setup: Setup,
  folder: string,
  options: { readonly sanitize: boolean; readonly compiler?: string },
): TaskRunner {
  const { sanitize, compiler = 'gcc' } = options;
  for (const [file, text] of files) writeFileSync(join(folder, file), text);
  writeFileSync(join(folder, 'driver.c'), cDriver(name, setup));
  const level = sanitize ? SANITIZERS : ['-Os'];
  const sources = [`${name}_encode.c`, `${name}_decode.c`];
  for (const source of sources) must(compiler, [...C_FLAGS, ...level, '-c', source], folder);
  const program = sanitize ? 'driver-sanitized' : 'driver';
  const objects = sources.map((source) => source.replace(/c$/, 'o'));
  must(compiler, ['-std=c99', ...level, '-o', program, 'driver.c', ...objects], folder);
  const elementBytes = elementBytesFor(setup.alphabetSize - 1);
  return (tasks) => runDriver(join(folder, program), tasks, elementBytes);
}

/** Tasks handed to one process at once: their answers must fit into a pipe's buffer here. */
const BATCH = 20_000;

/** What kind of task, a length, a capacity. */
const MOST_HEAD_BYTES = 1 + 4 + 4;

function runDriver(program: string, tasks: readonly Task[], elementBytes: number): Answer[] {
  const answers: Answer[] = [];
  for (let from = 0; from < tasks.length; from += BATCH) {
    const batch = tasks.slice(from, from + BATCH);
    const input = written(batch);
    const done = spawnSync(program, { input, maxBuffer: 2 ** 30 });
    if (done.error)
      throw new ParityError(`the exported program cannot be run: ${done.error.message}`);
    if (done.status !== 0) {
      throw new ParityError(
        `the exported program ends with ${done.status ?? done.signal}:\n${done.stderr.toString().slice(0, 2000)}`,
      );
    }
    readAnswers(done.stdout, batch, elementBytes, answers);
  }
  return answers;
}

/** The tasks one after another, as the driver reads them. */
function written(tasks: readonly Task[]): Buffer {
  const dataOf = (task: Task): Uint8Array => {
    const { buffer, byteOffset, byteLength } = task.kind === 'encode' ? task.symbols : task.bytes;
    return new Uint8Array(buffer, byteOffset, byteLength);
  };
  const size = tasks.reduce((sum, task) => sum + MOST_HEAD_BYTES + dataOf(task).length, 0);
  const input = Buffer.allocUnsafe(size);
  let at = 0;
  for (const task of tasks) {
    const data = dataOf(task);
    input[at++] = task.kind.charCodeAt(0);
    at = input.writeUInt32LE(task.kind === 'encode' ? task.symbols.length : data.length, at);
    if (task.kind === 'decode') at = input.writeUInt32LE(task.capacity, at);
    input.set(data, at);
    at += data.length;
  }
  return input.subarray(0, at);
}

function readAnswers(
  output: Buffer,
  tasks: readonly Task[],
  elementBytes: number,
  answers: Answer[],
): void {
  let at = 0;
  for (const task of tasks) {
    const [status, count, usedBytes] = [0, 4, 8].map((i) => output.readUInt32LE(at + i));
    at += 12;
    const size = task.kind === 'encode' ? 1 : elementBytes;
    const elements = elementsAt(output, at, count, size);
    at += count * size;
    answers.push({ status, elements, usedBytes });
  }
}

/** Elements of 1, 2 or 4 bytes, low first, at any place. */
function elementsAt(
  output: Buffer,
  at: number,
  count: number,
  size: number,
): Uint8Array | Uint16Array | Uint32Array {
  if (size === 1) return output.subarray(at, at + count);
  const elements = size === 2 ? new Uint16Array(count) : new Uint32Array(count);
  for (let i = 0; i < count; i++) elements[i] = output.readUIntLE(at + i * size, size);
  return elements;
}
