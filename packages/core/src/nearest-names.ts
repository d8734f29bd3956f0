/**
 * How many single-character insertions, deletions and replacements lead from one text to another.
 *
 * Source: Levenshtein (1966), Soviet Physics Doklady 10, 707-710.
 */
export function editDistance(from: string, to: string): number {
  let previous = Array.from({ length: to.length + 1 }, (_, index) => index);
  for (let i = 1; i <= from.length; i++) {
    const row = [i];
    for (let j = 1; j <= to.length; j++) {
      const replaced = (previous[j - 1] as number) + (from[i - 1] === to[j - 1] ? 0 : 1);
      row.push(Math.min(replaced, (previous[j] as number) + 1, (row[j - 1] as number) + 1));
    }
    previous = row;
  }
  return previous[to.length] as number;
}

/** The longest text that is compared: names come from files, and the comparison grows with the square. */
const LONGEST = 200;

/**
 * The candidates that a misspelt name most likely means, nearest first.
 *
 * @param name - what was written; letters of either case count as equal
 * @param candidates - what could have been meant; equally near ones stay in this order
 */
export function nearestNames(name: string, candidates: readonly string[], count = 3): readonly string[] {
  const written = name.slice(0, LONGEST).toLowerCase();
  return candidates
    .map((candidate) => ({ candidate, distance: editDistance(written, candidate.toLowerCase()) }))
    .sort((one, other) => one.distance - other.distance)
    .slice(0, count)
    .map(({ candidate }) => candidate);
}
