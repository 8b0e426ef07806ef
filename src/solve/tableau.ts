/**
 * A Rosenbrock method in its transformed form. Stage i solves
 *
 *   (I/(hγ) − J)·uᵢ = f(t + αᵢh, x + Σⱼ aᵢⱼuⱼ) + (1/h)·Σⱼ cᵢⱼuⱼ + h·dᵢ·f_t ,   j < i,
 *
 * and, the methods being stiffly accurate, x₁ = x + Σⱼ aₛⱼuⱼ + uₛ with uₛ as the error estimate.
 * Dense output at x(t + σh): x₀(1 − σ) + σ(x₁ + (1 − σ)(k₁ + σ(k₂ + σk₃ …))), kₘ = Σⱼ dense[m][j]·uⱼ.
 *
 * Reference: E. Hairer and G. Wanner, Solving Ordinary Differential Equations II, 2nd ed. (1996), Sec. IV.7, VI.4.
 */
export interface Tableau {
  readonly name: string;
  readonly order: number;
  readonly gamma: number;
  /** Strictly lower triangular, row i has i entries. */
  readonly a: readonly (readonly number[])[];
  readonly c: readonly (readonly number[])[];
  readonly alpha: readonly number[];
  readonly d: readonly number[];
  readonly dense: readonly (readonly number[])[];
}

/** How far the printed digits of a published table may be from its own row sums. */
const DIGITS = 1e-9;

/**
 * Returns the table after checking it against itself: with Γ = (I/γ − C)⁻¹, the nodes are the row sums of A·Γ, the
 * weights of f_t are the row sums of Γ, and the weights m·Γ sum to 1 while those of each term of dense output sum
 * to 0.
 *
 * @throws Error naming the table and the first relation that does not hold.
 */
export function checked(t: Tableau): Tableau {
  const s = t.alpha.length;
  const ofGamma = inverse(t).map((row) => row.reduce((sum, v) => sum + v, 0));
  const rowSum = (row: readonly number[]): number => row.reduce((sum, v, j) => sum + v * ofGamma[j], 0);
  const fail = (what: string): never => {
    throw new Error(`table ${t.name}: ${what} does not agree with its coefficients`);
  };
  // Written so that a missing number, which compares as false, is refused as well.
  const near = (x: number, y: number): boolean => Math.abs(x - y) <= DIGITS;
  for (let i = 0; i < s; i++) {
    if (t.a[i].length !== i || t.c[i].length !== i) fail(`the shape of stage ${i + 1}`);
    if (!near(rowSum(t.a[i]), t.alpha[i])) fail(`node ${i + 1}`);
    if (!near(ofGamma[i], t.d[i])) fail(`f_t weight ${i + 1}`);
  }
  if (!near(rowSum([...t.a[s - 1], 1]), 1)) fail('the sum of the weights');
  t.dense.forEach((row, m) => {
    if (!near(rowSum(row), 0)) fail(`dense output ${m + 1}`);
  });
  return Object.freeze(t);
}

/** Γ = (I/γ − C)⁻¹, lower triangular. */
function inverse(t: Tableau): number[][] {
  const s = t.alpha.length;
  const g: number[][] = [];
  for (let i = 0; i < s; i++) {
    g.push(new Array(s).fill(0));
    g[i][i] = t.gamma;
    for (let j = 0; j < i; j++) for (let k = j; k < i; k++) g[i][j] += t.gamma * t.c[i][k] * g[k][j];
  }
  return g;
}
