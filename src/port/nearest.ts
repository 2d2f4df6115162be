/**
 * The known word that `word` was most likely meant to be, or null when none is near: at most a third of its letters
 * (and at least one) inserted, dropped, replaced or swapped with a neighbour. The first of equals wins.
 */
export function nearest(word: string, known: readonly string[]): string | null {
  let best: string | null = null;
  let bestEdits = Math.max(1, Math.floor(word.length / 3)) + 1;
  for (const candidate of known) {
    const edits = editDistance(word.toLowerCase(), candidate.toLowerCase());
    if (edits < bestEdits && edits < candidate.length) {
      best = candidate;
      bestEdits = edits;
    }
  }
  return best;
}

/** Optimal string alignment distance (Damerau 1964, as restricted by each piece being edited once; from memory). */
function editDistance(a: string, b: string): number {
  let before: number[] = [];
  let above = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j <= b.length; j++) {
      const replaced = (above[j - 1] ?? 0) + (a[i - 1] === b[j - 1] ? 0 : 1);
      let edits = Math.min(replaced, (above[j] ?? 0) + 1, (row[j - 1] ?? 0) + 1);
      if (i > 1 && j > 1 && a[i - 1] === b[j - 2] && a[i - 2] === b[j - 1]) {
        edits = Math.min(edits, (before[j - 2] ?? 0) + 1);
      }
      row.push(edits);
    }
    before = above;
    above = row;
  }
  return above[b.length] ?? a.length;
}
