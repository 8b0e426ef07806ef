import { Matrix, solve } from 'ml-matrix';

/** Degree of numerator and denominator: at norm ≤ 1/2 the truncation is far below round-off. */
const DEGREE = 8;

/**
 * e^A by scaling and squaring with a diagonal Padé approximant.
 *
 * Reference: G. H. Golub and C. F. Van Loan, Matrix Computations, 3rd ed. (1996), Alg. 11.3.1; C. Moler and C. Van
 * Loan, SIAM Rev. 45, 3 (2003), method 3 (both
 * from memory).
 */
export function expm(a: Matrix): Matrix {
  const n = a.rows;
  const norm = Math.max(...a.to2DArray().map((row) => row.reduce((s, v) => s + Math.abs(v), 0)));
  const squarings = Math.max(0, Math.ceil(Math.log2(norm)) + 1);
  const scaled = Matrix.mul(a, 2 ** -squarings);
  const numerator = Matrix.eye(n);
  const denominator = Matrix.eye(n);
  let power = Matrix.eye(n);
  let c = 1;
  for (let k = 1; k <= DEGREE; k++) {
    c *= (DEGREE - k + 1) / (k * (2 * DEGREE - k + 1));
    power = scaled.mmul(power);
    numerator.add(Matrix.mul(power, c));
    denominator.add(Matrix.mul(power, k % 2 === 0 ? c : -c));
  }
  let f = solve(denominator, numerator);
  for (let k = 0; k < squarings; k++) f = f.mmul(f);
  return f;
}
