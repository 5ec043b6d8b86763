/** Edits (insert, delete, replace, swap of neighbours) that turn one word into the other. */
function editDistance(a: string, b: string): number {
  const rows = Array.from({ length: a.length + 1 }, (_, i) => [i, ...Array<number>(b.length).fill(0)]);
  for (let j = 0; j <= b.length; j++) rows[0]![j] = j;
  for (let i = 1; i <= a.length; i++)
    for (let j = 1; j <= b.length; j++) {
      const replace = rows[i - 1]![j - 1]! + (a[i - 1] === b[j - 1] ? 0 : 1);
      let best = Math.min(replace, rows[i - 1]![j]! + 1, rows[i]![j - 1]! + 1);
      if (i > 1 && j > 1 && a[i - 1] === b[j - 2] && a[i - 2] === b[j - 1])
        best = Math.min(best, rows[i - 2]![j - 2]! + 1);
      rows[i]![j] = best;
    }
  return rows[a.length]![b.length]!;
}

/** The candidate most like the word, when at most a third of its letters differ; case is ignored. */
export function nearest(word: string, candidates: Iterable<string>): string | null {
  let best: string | null = null;
  let least = Math.max(1, Math.floor(word.length / 3)) + 1;
  for (const candidate of candidates) {
    const distance = editDistance(word.toLowerCase(), candidate.toLowerCase());
    if (distance < least) [best, least] = [candidate, distance];
  }
  return best;
}

/** Up to ten names for a message, and how many more there are. */
export function listed(names: readonly string[]): string {
  const shown = names.slice(0, 10).join(', ');
  return names.length > 10 ? `${shown} and ${names.length - 10} more` : shown;
}
