/** The known name a mistyped one was probably meant to be. */

const LENGTH_WEIGHT = 1e-3; // decides between equal distances only

/**
 * The candidate nearest to a name by edit distance (insertions, deletions, substitutions and swaps of neighbours),
 * upper and lower case counted alike; of equally near ones that of the more similar length, because swapped letters are
 * the commonest slip. Null where even the nearest differs in more than about a third.
 *
 * Source  optimal string alignment: Damerau, Commun. ACM 7 (1964) 171; Wagner & Fischer, J. ACM 21 (1974) 168.
 */
export function suggestName(name: string, candidates: readonly string[]): string | null {
  let best: string | null = null;
  let smallest = Infinity;
  for (const candidate of candidates) {
    const distance = editDistance(name.toLowerCase(), candidate.toLowerCase());
    const allowed = Math.max(1, Math.floor(Math.max(name.length, candidate.length) / 3));
    if (distance > allowed) continue;
    const rank = distance + LENGTH_WEIGHT * Math.abs(name.length - candidate.length);
    if (rank < smallest) [best, smallest] = [candidate, rank];
  }
  return best;
}

/** Optimal string alignment distance; cost O(length of a × length of b). */
export function editDistance(a: string, b: string): number {
  let beforeLast: number[] = [];
  let last = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j <= b.length; j++) {
      const substituted = last[j - 1] + (a[i - 1] === b[j - 1] ? 0 : 1);
      row[j] = Math.min(substituted, last[j] + 1, row[j - 1] + 1);
      const swapped = i > 1 && j > 1 && a[i - 1] === b[j - 2] && a[i - 2] === b[j - 1];
      if (swapped) row[j] = Math.min(row[j], beforeLast[j - 2] + 1);
    }
    beforeLast = last;
    last = row;
  }
  return last[b.length];
}
