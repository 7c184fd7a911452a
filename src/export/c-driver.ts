import type { Setup } from '../coders/contract.ts';
import { elementBytesFor } from './exporter.ts';

/** Bytes of output buffers in the driver. */
const ROOM_BYTES = 1 << 25;

/**
 * A program around an exported coder that does what it is told on standard input: `e` with a count and symbols, `d` with a length, a
 * capacity and bytes; each answer is a status, a count of elements, the bytes used, and the elements. Numbers are 4 bytes, low first.
 */
export function cDriver(name: string, { lengths, alphabetSize }: Setup): string {
  const size = elementBytesFor(alphabetSize - 1);
  const known = lengths === 'known';
  return `#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include "${name}.h"

static uint8_t *bytes;

static uint32_t number(void)
{
    uint8_t b[4];
    if (fread(b, 1, 4, stdin) != 4) { exit(2); }
    return (uint32_t)b[0] | (uint32_t)b[1] << 8 | (uint32_t)b[2] << 16 | (uint32_t)b[3] << 24;
}

static void answer(uint32_t value)
{
    uint8_t b[4] = {(uint8_t)value, (uint8_t)(value >> 8), (uint8_t)(value >> 16), (uint8_t)(value >> 24)};
    fwrite(b, 1, 4, stdout);
}

static void take(void *to, size_t size)
{
    if (size > 0 && fread(to, 1, size, stdin) != size) { exit(2); }
}

int main(void)
{
    bytes = malloc(${ROOM_BYTES});
    if (bytes == NULL) { return 2; }
    for (int op = getchar(); op != EOF; op = getchar()) {
        uint32_t status, count, used = 0;
        if (op == 'e') {
            uint32_t given = number();
            /* Exactly as large as the data, so that a step beyond them is seen. */
            ${name}_symbol *own = malloc(given > 0u ? given * ${size}u : 1u);
            take(own, given * ${size}u);
            uint64_t most = ${name.toUpperCase()}_MOST_BYTES(given);
            if (most > ${ROOM_BYTES}u) { most = ${ROOM_BYTES}u; }
            status = ${name}_encode(own, given, bytes, (uint32_t)most, &count);
            free(own);
            answer(status);
            answer(count);
            answer(count);
            fwrite(bytes, 1, count, stdout);
        } else {
            uint32_t length = number();
            uint32_t capacity = number();
            uint8_t *own = malloc(length > 0u ? length : 1u);
            take(own, length);
            if (capacity > ${ROOM_BYTES}u) { return 3; }
            ${name}_symbol *room = malloc(capacity > 0u ? capacity * ${size}u : 1u);
            count = 0;
            status = ${name}_decode(own, length, room, capacity, ${known ? '' : '&count, '}&used);
            ${known ? 'count = status == 0u ? capacity : 0u;' : ''}
            answer(status);
            answer(count);
            answer(used);
            fwrite(room, ${size}, count, stdout);
            free(own);
            free(room);
        }
    }
    free(bytes);
    return 0;
}
`;
}
