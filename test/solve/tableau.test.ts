import { inverse, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { Rodas4, Rodas5P } from '../../src/solve/rodas-tableaus.ts';
import { checked, type Tableau } from '../../src/solve/tableau.ts';

/*
 * Order conditions by rooted trees: E. Hairer and G. Wanner, Solving Ordinary Differential Equations II, 2nd ed.
 * (1996), Sec. IV.7, Theorem 7.4 (from memory). With β = α + Γ a method has order p where for every tree of at
 * most p nodes
 *
 *   Σᵢ bᵢ·φᵢ = 1/density,   φᵢ(leaf) = 1,   φᵢ(tree) = Πᵤ Σⱼ Mᵢⱼ·φⱼ(u) over its branches u,
 *
 * M being β at a node with one branch and α at a node with more. These are the 1 + 1 + 2 + 4 + 9 conditions up to
 * order five: Σb = 1, b·β = 1/2, b·α² = 1/3, b·(Bβ) = 1/6, b·α³ = 1/4, …
 */
type Tree = readonly Tree[];

const nodes = (t: Tree): number => t.reduce((n, u) => n + nodes(u), 1);
const density = (t: Tree): number => t.reduce((d, u) => d * density(u), nodes(t));

/** Every tree of `n` nodes, each once. */
function trees(n: number): Tree[] {
  const smaller = Array.from({ length: n - 1 }, (_, k) => trees(k + 1)).flat();
  const grow = (left: number, from: number): Tree[] =>
    left === 0
      ? [[]]
      : smaller.flatMap((u, i) =>
          i < from || nodes(u) > left ? [] : grow(left - nodes(u), i).map((rest) => [u, ...rest]),
        );
  return grow(n - 1, 0);
}

interface Classical {
  readonly alpha: Matrix;
  readonly beta: Matrix;
  /** Weights b of the solution, of the embedded one, and of dense output at σ. */
  readonly weights: Matrix;
  readonly embedded: Matrix;
  dense(s: number): Matrix;
}

/** α, β and b from the transformed coefficients: Γ = (I/γ − C)⁻¹, α = A·Γ, b = m·Γ. */
function classical(t: Tableau): Classical {
  const s = t.alpha.length;
  const padded = (row: readonly number[]): number[] => [...row, ...new Array(s - row.length).fill(0)];
  const square = (rows: readonly (readonly number[])[]): Matrix => new Matrix(rows.map(padded));
  const gamma = inverse(Matrix.eye(s).div(t.gamma).sub(square(t.c)));
  const alpha = square(t.a).mmul(gamma);
  const weightsOf = (m: readonly number[]): Matrix => new Matrix([padded(m)]).mmul(gamma);
  const last = t.a[s - 1];
  return {
    alpha,
    beta: alpha.clone().add(gamma),
    weights: weightsOf([...last, 1]),
    embedded: weightsOf(last),
    dense: (q) => {
      const inner = t.dense
        .map(padded)
        .reduceRight((sum, row) => row.map((v, j) => v + q * sum[j]), padded([]));
      return weightsOf(padded([...last, 1]).map((m, j) => q * (m + (1 - q) * inner[j])));
    },
  };
}

/** φ(tree), a column. */
function phi(c: Classical, t: Tree): Matrix {
  const m = t.length === 1 ? c.beta : c.alpha;
  return t.reduce<Matrix>((p, u) => p.mul(m.mmul(phi(c, u))), Matrix.ones(c.alpha.rows, 1));
}

const fault = (c: Classical, weights: Matrix, t: Tree, power = 1): number =>
  Math.abs(weights.mmul(phi(c, t)).get(0, 0) - power / density(t));

const upTo = (order: number): Tree[] => Array.from({ length: order }, (_, k) => trees(k + 1)).flat();

/** Coefficients are printed to 16 digits and up to 150 in size. */
const DIGITS = 5e-13;

/** Stability function at iω: R(z) = 1 + z·b·(I − zB)⁻¹·1, the complex system written as a real one. */
function growth(c: Classical, frequency: number): number {
  const s = c.beta.rows;
  const block = Matrix.zeros(2 * s, 2 * s);
  block.setSubMatrix(Matrix.eye(s), 0, 0);
  block.setSubMatrix(Matrix.eye(s), s, s);
  block.setSubMatrix(Matrix.mul(c.beta, frequency), 0, s);
  block.setSubMatrix(Matrix.mul(c.beta, -frequency), s, 0);
  const right = Matrix.zeros(2 * s, 1);
  right.setSubMatrix(Matrix.ones(s, 1), 0, 0);
  const k = inverse(block).mmul(right);
  const real = c.weights.mmul(k.subMatrix(0, s - 1, 0, 0)).get(0, 0);
  const imaginary = c.weights.mmul(k.subMatrix(s, 2 * s - 1, 0, 0)).get(0, 0);
  return Math.hypot(1 - frequency * imaginary, frequency * real);
}

it('there are 1, 1, 2, 4, 9 rooted trees of 1 … 5 nodes', () => {
  expect([1, 2, 3, 4, 5].map((n) => trees(n).length)).toEqual([1, 1, 2, 4, 9]);
});

describe.each([Rodas5P, Rodas4])('$name', (table) => {
  const c = classical(table);
  const s = table.alpha.length;
  const next = trees(table.order + 1);

  it('meets every order condition up to its order, and not beyond', () => {
    for (const t of upTo(table.order)) expect(fault(c, c.weights, t), JSON.stringify(t)).toBeLessThan(DIGITS);
    expect(Math.max(...next.map((t) => fault(c, c.weights, t)))).toBeGreaterThan(1e-6);
  });

  it('has an embedded solution of one order less', () => {
    for (const t of upTo(table.order - 1))
      expect(fault(c, c.embedded, t), JSON.stringify(t)).toBeLessThan(DIGITS);
    const beyond = trees(table.order).map((t) => fault(c, c.embedded, t));
    expect(Math.max(...beyond)).toBeGreaterThan(1e-6);
  });

  it('has dense output of one order less, all through the step', () => {
    for (const q of [0.1, 0.35, 0.5, 0.8, 1])
      for (const t of upTo(table.order - 1))
        expect(fault(c, c.dense(q), t, q ** nodes(t)), `${JSON.stringify(t)} at ${q}`).toBeLessThan(DIGITS);
  });

  it('is stiffly accurate and forgets what is infinitely stiff', () => {
    const row = c.beta.getRow(s - 1);
    c.weights.getRow(0).forEach((b, j) => {
      expect(Math.abs(b - row[j])).toBeLessThan(DIGITS);
    });
    const atInfinity = 1 - c.weights.mmul(inverse(c.beta)).mmul(Matrix.ones(s, 1)).get(0, 0);
    expect(Math.abs(atInfinity)).toBeLessThan(1e-10);
  });

  it('lets no oscillation grow', () => {
    for (let e = -2; e <= 4; e += 0.05) expect(growth(c, 10 ** e), `at 10^${e}`).toBeLessThan(1 + 1e-12);
  });
});

it('Rodas5P has order six where the equations are linear and constant', () => {
  const c = classical(Rodas5P);
  const chain = (n: number): Tree => (n === 1 ? [] : [chain(n - 1)]);
  expect(fault(c, c.weights, chain(6))).toBeLessThan(1e-15);
  expect(fault(c, c.weights, chain(7))).toBeGreaterThan(1e-6);
});

describe('a wrong table is refused by the relation that fails', () => {
  const changed = (rows: readonly (readonly number[])[], i: number, j: number, by: number): number[][] =>
    rows.map((row, k) => row.map((v, l) => (k === i && l === j ? v + by : v)));
  const without = (list: readonly number[]): number[] => list.slice(0, -1);

  it.each<[string, Partial<Tableau>]>([
    ['node 3', { a: changed(Rodas4.a, 2, 1, 1e-6) }],
    ['node 4', { alpha: Rodas4.alpha.map((v, i) => (i === 3 ? v - 1e-6 : v)) }],
    ['f_t weight 5', { c: changed(Rodas4.c, 4, 2, 1e-6) }],
    ['f_t weight 2', { d: Rodas4.d.map((v, i) => (i === 1 ? v + 1e-6 : v)) }],
    ['f_t weight 6', { d: without(Rodas4.d) }],
    ['f_t weight 1', { gamma: 0.25 + 1e-6 }],
    ['the shape of stage 4', { a: Rodas4.a.map((row, i) => (i === 3 ? without(row) : row)) }],
    ['the shape of stage 5', { c: Rodas4.c.map((row, i) => (i === 4 ? [...row, 0] : row)) }],
    ['dense output 2', { dense: changed(Rodas4.dense, 1, 0, 1e-6) }],
    // One stage at the start of the step, taken as if it were stiffly accurate.
    ['the sum of the weights', { a: [[]], c: [[]], alpha: [0], d: [0.25], dense: [] }],
  ])('%s', (relation, part) => {
    const wrong = { ...Rodas4, ...part, name: 'Wrong' };
    expect(() => checked(wrong)).toThrow(`table Wrong: ${relation} does not agree with its coefficients`);
  });
});
