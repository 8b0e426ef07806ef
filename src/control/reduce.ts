import { type Dense, multiply, solve, zeros } from '../math/dense.ts';
import type { LinearPlant } from './linearise.ts';

/** States up to which a plant is taken whole. */
const SMALL = 160;

/** The plant itself while it is small; a larger one is projected on what matters between minutes and days. */
export function reduced(p: LinearPlant): LinearPlant {
  return p.a.n <= SMALL ? p : project(p);
}

/** 1/s: real points about which the projection matches the plant, from minutes to days. */
const SHIFTS = [3e-2, 1e-2, 3e-3, 1e-3, 5e-4, 2e-4, 1e-4, 4e-5, 1e-5, 2e-6];
const DEPTH = 3;

/**
 * Projection on the rational Krylov space of (σI − A)⁻¹B for real σ over the range of interest, Galerkin: value and
 * slopes of G(s) are matched at each σ. E. J. Grimme, Krylov projection methods for model reduction (1997) (from memory).
 */
function project(p: LinearPlant): LinearPlant {
  const { n } = p.a;
  const basis: Float64Array[] = [];
  for (const shift of SHIFTS) {
    const shifted: Dense = { n, m: n, a: p.a.a.map((v) => -v) };
    for (let i = 0; i < n; i++) shifted.a[i * n + i] += shift;
    let block: Dense | null = p.b;
    for (let k = 0; k < DEPTH && block; k++) {
      block = solve(shifted, block);
      if (block)
        for (let j = 0; j < block.m; j++)
          enter(
            basis,
            Float64Array.from({ length: n }, (_, i) => (block as Dense).a[i * (block as Dense).m + j]),
          );
    }
  }
  const m = basis.length;
  const v: Dense = zeros(n, m);
  basis.forEach((q, j) => {
    for (let i = 0; i < n; i++) v.a[i * m + j] = q[i];
  });
  const t: Dense = zeros(m, n);
  for (const [j, q] of basis.entries()) t.a.set(q, j * n);
  return { a: multiply(t, multiply(p.a, v)), b: multiply(t, p.b), c: multiply(p.c, v), d: p.d };
}

function enter(basis: Float64Array[], q: Float64Array): void {
  const size = Math.hypot(...q);
  for (let pass = 0; pass < 2; pass++)
    for (const b of basis) {
      let s = 0;
      for (let i = 0; i < q.length; i++) s += b[i] * q[i];
      for (let i = 0; i < q.length; i++) q[i] -= s * b[i];
    }
  const left = Math.hypot(...q);
  if (left > 1e-10 * size) basis.push(q.map((x) => x / left));
}
