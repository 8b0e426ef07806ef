import type { RunFigures } from './figures.ts';

interface Scored {
  readonly figures: RunFigures;
  readonly added: readonly unknown[];
}

/** kg, s and m³ below which two answers are equal in that respect. */
const SAME = { beyond: 0.01, outside: 1, solvent: 0.01, cost: 0.01 };

/**
 * Which of two answers is better (below zero: the first): what keeps the limits without doing harm elsewhere; then by
 * price-weighted cost where prices are stated, else by kg beyond the limits; then by time over; then by the organic
 * that it takes; then by the worst value.
 */
export function byScore(a: Scored, b: Scored): number {
  const [p, q] = [a.figures, b.figures];
  const clean = (x: Scored): number => (x.figures.kept && x.added.length === 0 ? 0 : x.figures.kept ? 1 : 2);
  const apart = (x: number, y: number, same: number): number => (Math.abs(x - y) < same ? 0 : x - y);
  return (
    clean(a) - clean(b) ||
    (p.cost !== null && q.cost !== null
      ? apart(p.cost, q.cost, SAME.cost)
      : apart(p.beyond, q.beyond, SAME.beyond)) ||
    apart(p.outside, q.outside, SAME.outside) ||
    apart(p.extraSolvent, q.extraSolvent, SAME.solvent) ||
    excess(p) - excess(q)
  );
}

/** Largest excess over any limit, relative to it. */
function excess({ limits }: RunFigures): number {
  return Math.max(
    ...limits.map(
      (l) => ((l.limit.side === 'below' ? 1 : -1) * (l.worst.value - l.limit.value)) / l.limit.value,
    ),
  );
}
