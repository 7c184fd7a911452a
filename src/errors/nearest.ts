/** Edit distance with swaps of neighbours (Damerau 1964, the restricted form), for "did you mean" hints. */
function editDistance(a: string, b: string): number {
  const width = b.length + 1;
  let before: number[] = [];
  let previous = Array.from({ length: width }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j < width; j++) {
      const same = a[i - 1] === b[j - 1] ? 0 : 1;
      let least = Math.min(previous[j] + 1, row[j - 1] + 1, previous[j - 1] + same);
      if (i > 1 && j > 1 && a[i - 1] === b[j - 2] && a[i - 2] === b[j - 1]) {
        least = Math.min(least, before[j - 2] + 1);
      }
      row.push(least);
    }
    before = previous;
    previous = row;
  }
  return previous[width - 1];
}

/**
 * The known word closest to `word`, or undefined when none is near enough to be a slip of the keyboard
 * (more than a third of the letters differ).
 */
export function nearestWord(word: string, known: Iterable<string>): string | undefined {
  let best: string | undefined;
  let bestDistance = Number.POSITIVE_INFINITY;
  for (const candidate of known) {
    const distance = editDistance(word.toLowerCase(), candidate.toLowerCase());
    if (distance < bestDistance) {
      bestDistance = distance;
      best = candidate;
    }
  }
  return best !== undefined && bestDistance <= Math.max(1, Math.floor(best.length / 3))
    ? best
    : undefined;
}
