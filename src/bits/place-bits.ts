/**
 * Copies the bits `from` (inclusive) to `to` (exclusive) of `source`, most significant first, to the bit `at` of `target`, where
 * bits are still 0. Cost: a step a byte; a block copy where both begin on a byte.
 */
export function placeBits(
  source: Uint8Array,
  from: number,
  to: number,
  target: Uint8Array,
  at: number,
): void {
  let read = from;
  let write = at;
  if (read % 8 === 0 && write % 8 === 0) {
    const whole = Math.floor((to - read) / 8);
    target.set(source.subarray(read / 8, read / 8 + whole), write / 8);
    read += whole * 8;
    write += whole * 8;
  }
  while (read < to) {
    const take = Math.min(8 - (read % 8), 8 - (write % 8), to - read);
    const bits = (source[(read - (read % 8)) / 8] >>> (8 - (read % 8) - take)) & ((1 << take) - 1);
    target[(write - (write % 8)) / 8] |= bits << (8 - (write % 8) - take);
    read += take;
    write += take;
  }
}
