/** The candidate within three edits of `word`, null where none is that close. */
export function nearest(word: string, candidates: readonly string[]): string | null {
  const ranked = candidates
    .map((candidate) => ({ candidate, distance: editDistance(candidate.toLowerCase(), word.toLowerCase()) }))
    .sort((a, b) => a.distance - b.distance);
  return ranked[0] && ranked[0].distance <= 3 ? ranked[0].candidate : null;
}

/** Levenshtein distance. */
function editDistance(a: string, b: string): number {
  let previous = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j <= b.length; j++)
      row.push(Math.min(previous[j]! + 1, row[j - 1]! + 1, previous[j - 1]! + (a[i - 1] === b[j - 1] ? 0 : 1)));
    previous = row;
  }
  return previous[b.length]!;
}
