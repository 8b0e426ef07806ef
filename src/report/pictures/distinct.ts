import type { CommissionResult } from '../../study/commission/commission.ts';
import type { ComesGood } from '../../study/commission/good.ts';

/** Twins come good within so many s of each other, and end within this share of each other. */
const SAME_TIME = 1;
const SAME_END = 1e-6;

const KINDS = ['outlet', 'tank', 'stream', 'stage'];

/**
 * Quantities of streams and tanks to be drawn, those with a limit first, then outlets: of several that are one and the
 * same liquid (a tank, and what its stream divides into) only the first.
 */
export function distinct(r: CommissionResult): ComesGood[] {
  const limited = new Set(r.limits.map((l) => l.path));
  const order = (q: ComesGood): number =>
    (limited.has(q.quantity.path) ? 0 : 10) + KINDS.indexOf(q.quantity.kind);
  const kept: ComesGood[] = [];
  for (const q of r.quantities.filter((c) => c.quantity.kind !== 'stage').sort((a, b) => order(a) - order(b)))
    if (!kept.some((k) => twins(k, q))) kept.push(q);
  return kept;
}

function twins(a: ComesGood, b: ComesGood): boolean {
  if (a.quantity.component !== b.quantity.component || a.final === null || b.final === null) return false;
  const near = (x: number | null, y: number | null): boolean =>
    x === null || y === null ? x === y : Math.abs(x - y) <= SAME_TIME;
  return (
    Math.abs(a.final - b.final) <= SAME_END * Math.abs(a.final) &&
    a.ofChange.every((t, i) => near(t, b.ofChange[i]))
  );
}
