/**
 * `huffman` with shipped tables: a million 32-byte messages against the same bytes as one message,
 * in turn in one process, for each rule of lengths. What is printed is the speed in messages as a
 * share of the whole-file speed: 0.8 and more is what is asked for.
 */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import type { Coded, CodedInput, Lengths, Setup } from '../src/coders/contract.ts';
import { huffman } from '../src/coders/huffman.ts';
import { oneMessage, type SymbolSequence } from '../src/symbols/sequence.ts';

const MESSAGES = 1_000_000;
const MESSAGE_BYTES = 32;
const SIZE = MESSAGES * MESSAGE_BYTES;
const ROUNDS = 9;

const text = readFileSync(join(process.env['BITASSAY_DATASETS'] ?? '.datasets', 'moby.txt'));
const symbols = new Uint8Array(SIZE);
for (let at = 0; at < SIZE; at += text.length)
  symbols.set(text.subarray(0, Math.min(text.length, SIZE - at)), at);
const whole = oneMessage(symbols, 256);
const packets: SymbolSequence = {
  alphabetSize: 256,
  symbols,
  messageEnds: Uint32Array.from({ length: MESSAGES }, (_, i) => MESSAGE_BYTES * (i + 1)),
};
const coder = huffman.create({ maxbits: 24, unseen: 'add:1/2' });
const base: Setup = {
  policy: 'shipped',
  alphabetSize: 256,
  reset: 'message',
  lengths: 'sent',
  align: 8,
};
const trainer = coder.trainer!(base);
trainer.push(whole);
const tables = trainer.finish();

function encode(setup: Setup, sequence: SymbolSequence): Coded {
  const encoder = coder.encoder(setup);
  encoder.push(sequence);
  return encoder.finish();
}

let kept = 0;

/** Milliseconds of processor time of one run: other work on the machine disturbs it less than the clock's. */
function timed(run: () => number): number {
  const start = process.cpuUsage();
  kept += run();
  const { user, system } = process.cpuUsage(start);
  return (user + system) / 1e3;
}

function middle(values: number[]): number {
  return values.toSorted((a, b) => a - b)[Math.floor(values.length / 2)];
}

/** Speed of `short` as a share of that of `long`: median, least and most of the rounds. */
function compare(name: string, long: () => number, short: () => number): void {
  const longs: number[] = [];
  const shorts: number[] = [];
  for (let round = -2; round < ROUNDS; round++) {
    const one = timed(long);
    const other = timed(short);
    if (round < 0) continue;
    longs.push(one);
    shorts.push(other);
  }
  const ratios = longs.map((time, i) => time / shorts[i]).sort((a, b) => a - b);
  console.log(
    `${name.padEnd(24)}${middle(longs).toFixed(1).padStart(10)}${middle(shorts).toFixed(1).padStart(14)}` +
      `${middle(ratios).toFixed(2).padStart(9)}   ${ratios[0].toFixed(2)} to ${ratios[ROUNDS - 1].toFixed(2)}`,
  );
}

console.log(
  `${'32-byte messages'.padEnd(24)}${'whole, ms'.padStart(10)}${'messages, ms'.padStart(14)}${'speed'.padStart(9)}   least to most of ${ROUNDS}`,
);
for (const lengths of ['known', 'link', 'sent'] as Lengths[]) {
  const setup: Setup = { ...base, lengths, tables };
  const inputOf = ({ bytes, messageEndsBits }: Coded, sequence: SymbolSequence): CodedInput => ({
    bytes,
    messageCount: sequence.messageEnds.length,
    ...(lengths === 'link' ? { messageEndsBits } : {}),
    ...(lengths === 'known'
      ? {
          symbolCounts: sequence.messageEnds.map(
            (end, i) => end - (i === 0 ? 0 : sequence.messageEnds[i - 1]),
          ),
        }
      : {}),
  });
  const wholeInput = inputOf(encode(setup, whole), whole);
  const packetInput = inputOf(encode(setup, packets), packets);
  const decode = (input: CodedInput) =>
    coder.decoder(setup, { maxSymbols: SIZE }).decode(input).sequence.symbols[SIZE - 1];
  compare(
    `encode, lengths ${lengths}`,
    () => encode(setup, whole).bytes.length,
    () => encode(setup, packets).bytes.length,
  );
  compare(
    `decode, lengths ${lengths}`,
    () => decode(wholeInput),
    () => decode(packetInput),
  );
}
console.log(`(check ${kept})`);
