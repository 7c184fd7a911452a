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

function runDriver(program: string, tasks: readonly Task[], elementBytes: number): Answer[] {
  const answers: Answer[] = [];
  for (let from = 0; from < tasks.length; from += BATCH) {
    const batch = tasks.slice(from, from + BATCH);
    const input = Buffer.concat(batch.map((task) => written(task)));
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

function written(task: Task): Buffer {
  const numbers =
    task.kind === 'encode' ? [task.symbols.length] : [task.bytes.length, task.capacity];
  const head = Buffer.alloc(1 + 4 * numbers.length);
  head[0] = task.kind.charCodeAt(0);
  numbers.forEach((value, i) => {
    head.writeUInt32LE(value, 1 + 4 * i);
  });
  const { buffer, byteOffset, byteLength } = task.kind === 'encode' ? task.symbols : task.bytes;
  return Buffer.concat([head, Buffer.from(buffer, byteOffset, byteLength)]);
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
    const elements = Array.from({ length: count }, (_, i) =>
      output.readUIntLE(at + i * size, size),
    );
    at += count * size;
    answers.push({ status, elements, usedBytes });
  }
}
