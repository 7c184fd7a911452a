import type { SortedSuffixes } from './suffix-common.ts';

/** Marks the node above which there is none. */
const NONE = -1;

/**
 * Every string that occurs in a sequence at least twice, as the nodes of a tree: a node stands for all its occurrences'
 * longest common string, and holds where it first begins.
 *
 * Strings of the same first place on one path hang together: for a question about the past only the longest of them
 * matters, so each node points to the nearest node above that begins earlier.
 */
export class Repeats {
  readonly symbolCount: number;
  /** Shape [n]: the node of the longest repeated string that begins at a position, {@link NONE} for none. */
  readonly #deepest: Int32Array;
  /** By node: length of its string, first position at which that begins, node above that begins earlier. */
  readonly #length: Int32Array;
  readonly #first: Int32Array;
  readonly #earlier: Int32Array;

  /**
   * Cost: linear time; up to 24 bytes a symbol while it is made, 16 afterwards, beside the sorted suffixes.
   */
  constructor({ order, common }: SortedSuffixes) {
    const { length: n } = order;
    this.symbolCount = n;
    const deepest = new Int32Array(n).fill(NONE);
    // A node is made for each rise of the common length, so there are fewer nodes than symbols.
    let most = 0;
    for (let j = 1; j < n; j++) if (common[order[j]] > 0) most++;
    const length = new Int32Array(most);
    const first = new Int32Array(most);
    const above = new Int32Array(most).fill(NONE);
    const finished = new Int32Array(most);
    const open = new Int32Array(most);
    let made = 0;
    let done = 0;
    let depth = 0;
    for (let j = 0; j < n; j++) {
      const before = j === 0 ? 0 : common[order[j]];
      const after = j + 1 === n ? 0 : common[order[j + 1]];
      // Nodes whose string is longer than what suffix j − 1 shares with j end here.
      let below = NONE;
      while (depth > 0 && length[open[depth - 1]] > before) {
        below = open[--depth];
        finished[done++] = below;
        if (depth > 0 && length[open[depth - 1]] >= before) {
          const parent = open[depth - 1];
          above[below] = parent;
          if (first[below] < first[parent]) first[parent] = first[below];
          below = NONE;
        }
      }
      if (below !== NONE && before > 0) {
        const node = made++;
        length[node] = before;
        first[node] = first[below];
        above[below] = node;
        open[depth++] = node;
      }
      if (after > before) {
        const node = made++;
        length[node] = after;
        first[node] = order[j];
        open[depth++] = node;
      }
      if (depth > 0) {
        const node = open[depth - 1];
        deepest[order[j]] = node;
        if (order[j] < first[node]) first[node] = order[j];
      }
    }
    while (depth > 0) {
      const node = open[--depth];
      finished[done++] = node;
      if (depth > 0) {
        const parent = open[depth - 1];
        above[node] = parent;
        if (first[node] < first[parent]) first[parent] = first[node];
      }
    }
    // What ends last lies above: from there down, the node above is settled before it is asked for.
    for (let f = done - 1; f >= 0; f--) {
      const node = finished[f];
      const parent = above[node];
      if (parent !== NONE && first[parent] === first[node]) above[node] = above[parent];
    }
    this.#deepest = deepest;
    this.#length = length;
    this.#first = first;
    this.#earlier = above;
  }

  /**
   * For each position, the length of the longest string that begins there and occurs wholly before it; it may not reach
   * into the position itself.
   * @returns shape [n]
   * Cost: in practice linear: a position looks only at nodes that could lengthen the match which its predecessor leaves.
   */
  pastMatches(): Uint32Array {
    const lengths = new Uint32Array(this.symbolCount);
    const nodeLength = this.#length;
    const first = this.#first;
    const earlier = this.#earlier;
    let best = 0;
    for (let i = 0; i < lengths.length; i++) {
      if (best > 0) best--;
      let node = this.#deepest[i];
      while (node !== NONE && nodeLength[node] > best) {
        const room = i - first[node];
        if (room >= nodeLength[node]) {
          best = nodeLength[node];
          break;
        }
        if (room > best) best = room;
        node = earlier[node];
      }
      lengths[i] = best;
    }
    return lengths;
  }

  /**
   * Components of the exhaustive history: each the shortest string that does not begin at any earlier place, though it may
   * run on into itself; the last may be one that does.
   *
   * Source: A. Lempel, J. Ziv, "On the Complexity of Finite Sequences", 1976, §II.
   */
  componentCount(): number {
    let components = 0;
    for (let i = 0; i < this.symbolCount; components++) {
      let node = this.#deepest[i];
      while (node !== NONE && this.#first[node] === i) node = this.#earlier[node];
      i += node === NONE ? 1 : this.#length[node] + 1;
    }
    return components;
  }
}
