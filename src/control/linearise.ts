import { type Dense, exponential, hessenberg, resolvent, solve, zeros } from '../math/dense.ts';
import type { Complex } from '../math/eigen.ts';
import { SteadyRows } from '../solve/steady.ts';
import type { F, Pattern, System } from '../solve/system.ts';

/** dx/dt = A·x + B·u, y = C·x + D·u for small deviations: the chosen inputs and outputs, in their order. */
export interface LinearPlant {
  readonly a: Dense;
  readonly b: Dense;
  readonly c: Dense;
  readonly d: Dense;
}

/**
 * The exact linearisation at a steady state. Boundary totals and places that keep their value take no part; of a set
 * that only circulates one place is what the others leave of its sum.
 */
export function linearise(
  system: System,
  x: F,
  w: F,
  p: F,
  inputs: readonly number[],
  outputs: readonly number[],
): LinearPlant {
  const rows = new SteadyRows(system);
  const values = new Float64Array(rows.pattern.column.length);
  rows.residual(x, w, p, new Float64Array(x.length));
  rows.jacobian(x, w, p, values);
  const byInput = new Float64Array(system.B.column.length);
  system.byInput(x, w, p, byInput);
  const c = new Float64Array(system.C.column.length);
  const d = new Float64Array(system.D.column.length);
  system.byOutput(x, w, p, c, d);
  const sums = new Map<number, readonly number[]>();
  system.steady.forEach((row, i) => {
    if (typeof row === 'object' && 'keepsSumOf' in row) sums.set(i, row.keepsSumOf);
  });
  const kept = system.steady.flatMap((row, i) =>
    system.places[i].kind === 'total' || row === 'hold' || sums.has(i) ? [] : [i],
  );
  const number = new Map(kept.map((i, k) => [i, k]));
  const n = kept.length;
  const fill = (to: Dense, row: number, pattern: Pattern, from: number, v: F): void => {
    for (let k = pattern.rowStart[from]; k < pattern.rowStart[from + 1]; k++) {
      const column = pattern.column[k];
      const at = number.get(column);
      if (at !== undefined) to.a[row * n + at] += v[k];
      for (const m of sums.get(column) ?? []) {
        const other = number.get(m);
        if (m !== column && other !== undefined) to.a[row * n + other] -= v[k];
      }
    }
  };
  const A = zeros(n);
  const B = zeros(n, inputs.length);
  const C = zeros(outputs.length, n);
  const D = zeros(outputs.length, inputs.length);
  kept.forEach((i, row) => {
    fill(A, row, rows.pattern, i, values);
    for (let k = system.B.rowStart[i]; k < system.B.rowStart[i + 1]; k++) {
      const column = inputs.indexOf(system.B.column[k]);
      if (column < 0) continue;
      const volume = system.steady[i];
      B.a[row * inputs.length + column] += byInput[k];
      // A stationary composition in a volume that drifts: what the volume does is taken out.
      if (typeof volume === 'object' && 'followsVolume' in volume) {
        const v = volume.followsVolume;
        for (let q = system.B.rowStart[v]; q < system.B.rowStart[v + 1]; q++)
          if (system.B.column[q] === system.B.column[k])
            B.a[row * inputs.length + column] -= (x[i] / x[v]) * byInput[q];
      }
    }
  });
  outputs.forEach((o, row) => {
    fill(C, row, system.C, o, c);
    for (let k = system.D.rowStart[o]; k < system.D.rowStart[o + 1]; k++) {
      const column = inputs.indexOf(system.D.column[k]);
      if (column >= 0) D.a[row * inputs.length + column] += d[k];
    }
  });
  return { a: A, b: B, c: C, d: D };
}

/** Gains at rest, −C·A⁻¹·B + D, by output and input; null where something only integrates. */
export function restGains({ a, b, c, d }: LinearPlant): number[][] | null {
  const x = solve(a, b);
  if (x === null || !x.a.every(Number.isFinite)) return null;
  return Array.from({ length: c.n }, (_, i) =>
    Array.from({ length: b.m }, (__, j) => {
      let s = d.a[i * b.m + j];
      for (let k = 0; k < a.n; k++) s -= c.a[i * a.n + k] * x.a[k * b.m + j];
      return s;
    }),
  );
}

/** Response of the first output to a unit step of each input, `t` s after it: ∫₀ᵗ C·e^{As}·B ds + D. */
export function stepGains({ a, b, c, d }: LinearPlant, t: number): number[] {
  const n = a.n;
  const m = n + b.m;
  const big = zeros(m);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) big.a[i * m + j] = t * a.a[i * n + j];
    for (let j = 0; j < b.m; j++) big.a[i * m + n + j] = t * b.a[i * b.m + j];
  }
  const e = exponential(big);
  return Array.from({ length: b.m }, (_, j) => {
    let s = d.a[j];
    for (let k = 0; k < n; k++) s += c.a[k] * e.a[k * m + n + j];
    return s;
  });
}

/** G(jω) from each input to the first output, one factorisation by Hessenberg's form for all frequencies. */
export function frequencyResponse(plant: LinearPlant): (omega: number) => Complex[] {
  const form = hessenberg(plant.a, plant.b, plant.c);
  return (omega) =>
    resolvent(form, { re: 0, im: omega }, 0).map((g, j) => ({ re: g.re + plant.d.a[j], im: g.im }));
}
