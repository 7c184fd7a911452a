import type { Candidate } from '../coders/candidate.ts';
import type { Setup } from '../coders/contract.ts';
import { SeededGenerator } from '../statistics/generator.ts';
import { newSymbolArray, type SymbolArray } from '../symbols/sequence.ts';
import { messageDecoder } from './coded-messages.ts';
import type { ExportedCoder } from './exporter.ts';

/** About how many symbols are coded again and again. */
const SYMBOLS = 240;

/**
 * Symbols that look like the training data to the coder and are none of it: what its tables make of random bits.
 */
function typicalSymbols(
  candidate: Candidate,
  setup: Setup,
  longestSymbolBits: number,
): SymbolArray {
  const { unitSymbols = 1, alphabetSize } = setup;
  const count = Math.max(1, Math.round(SYMBOLS / unitSymbols)) * unitSymbols;
  const random = new SeededGenerator(1);
  const bytes = new Uint8Array(Math.ceil((count * longestSymbolBits) / 8) + 16);
  for (let i = 0; i < bytes.length; i++) bytes[i] = random.integer(0, 255);
  const decode = messageDecoder(
    candidate.create(),
    // No padding, which would have to be zeros.
    { ...setup, lengths: 'known', align: 1 },
    count,
  );
  const found = decode(bytes);
  if (found?.length === count) return found;
  const symbols = newSymbolArray(alphabetSize, count);
  for (let i = 0; i < count; i++) symbols[i] = random.integer(0, alphabetSize - 1);
  return symbols;
}

/** `selftime.c`: a program for the target that measures both ends there. */
export function selftimeFile(
  name: string,
  candidate: Candidate,
  setup: Setup,
  coder: ExportedCoder,
): string {
  const symbols = typicalSymbols(candidate, setup, coder.longestSymbolBits);
  const known = setup.lengths === 'known';
  const upper = name.toUpperCase();
  return `/*
 * Measures ${name} on the machine that this is built for: ticks per symbol, encoder and decoder.
 * TICKS() is clock() here; on a device define it as its own counter, and PRINT as what it can print with.
 * The symbols are drawn from the tables, not taken from any data. Not built for a certified measurement.
 */
#include <stdio.h>
#include <time.h>
#include "${name}.h"

#ifndef TICKS
#define TICKS() ((uint32_t)clock())
#endif
#ifndef PRINT
#define PRINT(what, ticks, count) printf("%s: %lu ticks for %lu symbols\\n", what, (unsigned long)(ticks), (unsigned long)(count))
#endif
#ifndef ROUNDS
#define ROUNDS 20000u
#endif

#define COUNT ${symbols.length}u

static const ${name}_symbol sample[COUNT] = {
    ${Array.from(symbols).join(', ')}
};

int main(void)
{
    static uint8_t coded[${upper}_MOST_BYTES(COUNT)];
    static ${name}_symbol back[COUNT];
    uint32_t bytes = 0u, used = 0u${known ? '' : ', count = 0u'};
    uint32_t start = TICKS();
    for (uint32_t i = 0u; i < ROUNDS; i++) {
        if (${name}_encode(sample, COUNT, coded, (uint32_t)sizeof coded, &bytes) != ${upper}_OK) { return 1; }
    }
    PRINT("encoder", TICKS() - start, ROUNDS * COUNT);
    start = TICKS();
    for (uint32_t i = 0u; i < ROUNDS; i++) {
        if (${name}_decode(coded, bytes, back, COUNT, ${known ? '' : '&count, '}&used) != ${upper}_OK) { return 1; }
    }
    PRINT("decoder", TICKS() - start, ROUNDS * COUNT);
    for (uint32_t i = 0u; i < COUNT; i++) {
        if (back[i] != sample[i]) { return 1; }
    }
    return 0;
}
`;
}
