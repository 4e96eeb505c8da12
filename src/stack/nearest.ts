/**
 * The candidate that a mistyped word most likely means, or null when none is near: at most a third of its letters
 * may differ (common practice, no source).
 */
export function nearest(word: string, candidates: Iterable<string>): string | null {
  let best: string | null = null;
  let least = Number.POSITIVE_INFINITY;
  for (const candidate of candidates) {
    const distance = editDistance(word.toLowerCase(), candidate.toLowerCase());
    if (distance < least && distance <= Math.max(1, Math.floor(candidate.length / 3))) {
      best = candidate;
      least = distance;
    }
  }
  return best;
}

/** Insertions, deletions and replacements between two words (Levenshtein 1966), row by row. */
export function editDistance(a: string, b: string): number {
  let previous = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j <= b.length; j++) {
      const replaced = previous[j - 1]! + (a[i - 1] === b[j - 1] ? 0 : 1);
      row.push(Math.min(replaced, previous[j]! + 1, row[j - 1]! + 1));
    }
    previous = row;
  }
  return previous[b.length]!;
}
