import { show } from './show.ts';

/** Candidates that a message lists when none is near. */
const FEW = 12;
/** Letters of a word in which two changes would leave nothing of it. */
const SHORT = 4;
/** Letters beyond which a word is no slip of a known one. */
const LONGEST = 200;

/** The candidate most like `word`, or null where none is like it at all. Optimal string alignment distance. */
export function nearest(word: string, candidates: readonly string[]): string | null {
  if (word.length > LONGEST) return null;
  let best: string | null = null;
  let least = changes(word.length) + 1;
  for (const c of candidates) {
    const [a, b] = [word.toLowerCase(), c.toLowerCase()];
    const tooFar = Math.abs(a.length - b.length) >= least;
    const d = isStart(a, b) || startsSame(a, b) ? 1 : tooFar ? least : distance(a, b);
    if (d < least) {
      least = d;
      best = c;
    }
  }
  return best;
}

/** Letters that may differ: of one letter nothing would be left but its case. */
const changes = (length: number): number =>
  length === 1 ? 0 : length <= SHORT ? 1 : Math.max(2, Math.floor(length * 0.4));

/** Paths that differ by a first name cut short: `raff.copper` for `raffinate.copper`. */
function startsSame(a: string, b: string): boolean {
  const [i, j] = [a.indexOf('.'), b.indexOf('.')];
  return i > 0 && j > 0 && a.slice(i) === b.slice(j) && isStart(a.slice(0, i), b.slice(0, j));
}

/** A word cut short, or one that goes on. */
const isStart = (a: string, b: string): boolean =>
  Math.min(a.length, b.length) >= 3 && (a.startsWith(b) || b.startsWith(a));

/** "; did you mean 'flow'?" or, where nothing is near, nothing. */
export function guess(word: string, candidates: readonly string[]): string {
  const near = nearest(word, candidates);
  return near === null ? '' : `; did you mean ${show(near)}?`;
}

/** The guess or, where nothing is near, what is known while that is a short list. */
export function hint(word: string, candidates: readonly string[]): string {
  const near = guess(word, candidates);
  if (near !== '' || candidates.length === 0 || candidates.length > FEW) return near;
  return `; known here: ${candidates.join(', ')}`;
}

function distance(a: string, b: string): number {
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
