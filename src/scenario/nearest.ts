/** The candidate most like `word`, or null where none is like it at all. Optimal string alignment distance. */
export function nearest(word: string, candidates: readonly string[]): string | null {
  let best: string | null = null;
  let least = Math.max(2, Math.floor(word.length * 0.4)) + 1;
  for (const c of candidates) {
    const d = distance(word.toLowerCase(), c.toLowerCase());
    if (d < least) {
      least = d;
      best = c;
    }
  }
  return best;
}

/** " (did you mean 'flow'?)" or, where nothing is near, the list of what is known while it is short. */
export function hint(word: string, candidates: readonly string[]): string {
  const near = nearest(word, candidates);
  if (near !== null) return `; did you mean '${near}'?`;
  return candidates.length > 0 && candidates.length <= 12 ? `; known here: ${candidates.join(', ')}` : '';
}

function distance(a: string, b: string): number {
  if (Math.abs(a.length - b.length) > 12) return 99;
  const rows = Array.from({ length: a.length + 1 }, (_, i) => [i]);
  for (let j = 1; j <= b.length; j++) rows[0][j] = j;
  for (let i = 1; i <= a.length; i++)
    for (let j = 1; j <= b.length; j++) {
      const same = a[i - 1] === b[j - 1] ? 0 : 1;
      let d = Math.min(rows[i - 1][j] + 1, rows[i][j - 1] + 1, rows[i - 1][j - 1] + same);
      if (i > 1 && j > 1 && a[i - 1] === b[j - 2] && a[i - 2] === b[j - 1])
        d = Math.min(d, rows[i - 2][j - 2] + 1);
      rows[i][j] = d;
    }
  return rows[a.length][b.length];
}
