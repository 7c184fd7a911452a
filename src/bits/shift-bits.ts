/** Moves bits to the right by 1 … 31, from the first bit of byte `from` to beyond byte `to`. */
export function shiftRight(view: DataView, from: number, to: number, shift: number): void {
  let at = from + (((to - from) >>> 2) << 2);
  for (; at > from; at -= 4)
    view.setInt32(at, (view.getInt32(at) >>> shift) | (view.getInt32(at - 4) << (32 - shift)));
  view.setInt32(from, view.getInt32(from) >>> shift);
}

/** The same to the left; the first bits of byte `from` are lost. */
export function shiftLeft(view: DataView, from: number, to: number, shift: number): void {
  for (let at = from; at <= to; at += 4)
    view.setInt32(at, (view.getInt32(at) << shift) | (view.getInt32(at + 4) >>> (32 - shift)));
}
