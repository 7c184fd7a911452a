/**
 * Ranks, equal for what cannot be told apart. The best thing without a rank leads the next rank; everything without a rank
 * that is not apart from it shares that rank, and the next rank is one more than how many things have one. So ranks go
 * 1, 1, 3 as in a race.
 *
 * Being told apart is not transitive, and this is what follows. Two things of one rank may be apart from one another: only
 * their leader is near both. And a thing may stand before another of a better rank: it is apart from that rank's leader,
 * while the other, whose figures vary more, is not. What holds always: each thing is not apart from its own leader, and it
 * is apart from every leader of a better rank.
 *
 * @param count  things, 0 … count − 1, best first
 * @param apart  whether the thing `worse` can be told from the better thing `leader`
 * @returns shape [count], ranks 1 … count
 * Cost: at most count · (count − 1) ÷ 2 calls of `apart`.
 */
export function equalRanks(
  count: number,
  apart: (leader: number, worse: number) => boolean,
): Uint32Array {
  const ranks = new Uint32Array(count);
  let ranked = 0;
  for (let leader = 0; leader < count; leader++) {
    if (ranks[leader] !== 0) continue;
    const rank = ranked + 1;
    ranks[leader] = rank;
    ranked++;
    for (let worse = leader + 1; worse < count; worse++) {
      if (ranks[worse] !== 0 || apart(leader, worse)) continue;
      ranks[worse] = rank;
      ranked++;
    }
  }
  return ranks;
}
