/**
 * The candidate that a misspelt word most likely meant: the least edit distance (insertions, deletions,
 * substitutions and swaps of neighbours; Damerau 1964), if it is at most a third of the word's length (at least 1).
 * @returns null where none is near
 */
export function nearest(word: string, candidates: readonly string[]): string | null {
  let best: string | null = null;
  let least = Math.max(1, Math.floor(Math.min(word.length, 60) / 3)) + 1;
  for (const candidate of candidates) {
    const far = distance(word.slice(0, 60).toLowerCase(), candidate.toLowerCase());
    if (far < least) [best, least] = [candidate, far];
  }
  return best;
}

function distance(a: string, b: string): number {
  let before: number[] = [];
  let last = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j <= b.length; j++) {
      const same = a[i - 1] === b[j - 1];
      let least = Math.min(last[j]! + 1, row[j - 1]! + 1, last[j - 1]! + (same ? 0 : 1));
      if (i > 1 && j > 1 && a[i - 1] === b[j - 2] && a[i - 2] === b[j - 1]) least = Math.min(least, before[j - 2]! + 1);
      row.push(least);
    }
    [before, last] = [last, row];
  }
  return last[b.length]!;
}
