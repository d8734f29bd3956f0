/**
 * Edits that turn one word into another: insertions, deletions, replacements and swaps of neighbours
 * (the "optimal string alignment" form of Damerau, 1964, Communications of the ACM 7, 171-176).
 */
export function editDistance(from: string, to: string): number {
  let beforeLast: number[] = [];
  let last = Array.from({ length: to.length + 1 }, (_, index) => index);
  for (let i = 1; i <= from.length; i += 1) {
    const row = [i];
    for (let j = 1; j <= to.length; j += 1) {
      const replace = last[j - 1]! + (from[i - 1] === to[j - 1] ? 0 : 1);
      row[j] = Math.min(replace, last[j]! + 1, row[j - 1]! + 1);
      if (i > 1 && j > 1 && from[i - 1] === to[j - 2] && from[i - 2] === to[j - 1]) {
        row[j] = Math.min(row[j]!, beforeLast[j - 2]! + 1);
      }
    }
    beforeLast = last;
    last = row;
  }
  return last[to.length]!;
}

/**
 * The candidate a misspelt word most likely meant; undefined when none is near.
 *
 * Case does not count. Near is: at most a third of the longer word has to change (one letter for short words),
 * or one of the two begins with the other.
 */
export function nearest(word: string, candidates: readonly string[]): string | undefined {
  // A hostile file may hold a key of any length; nothing that long is a typing slip.
  if (word.length > 100) return undefined;
  const asked = word.toLowerCase();
  let best: { candidate: string; distance: number } | undefined;
  for (const candidate of candidates) {
    const known = candidate.toLowerCase();
    const starts = asked.length >= 3 && (known.startsWith(asked) || asked.startsWith(known));
    const distance = starts ? 0.5 : editDistance(asked, known);
    const limit = Math.max(1, Math.floor(Math.max(asked.length, known.length) / 3));
    if (distance <= limit && (best === undefined || distance < best.distance)) best = { candidate, distance };
  }
  return best?.candidate;
}
