import type { Complex } from './eigen.ts';

/** Small dense matrices, row-major: n rows of m. */
export interface Dense {
  readonly n: number;
  readonly m: number;
  readonly a: Float64Array;
}

export const zeros = (n: number, m = n): Dense => ({ n, m, a: new Float64Array(n * m) });

export function identity(n: number): Dense {
  const q = zeros(n);
  for (let i = 0; i < n; i++) q.a[i * n + i] = 1;
  return q;
}

/** p·q */
export function multiply(p: Dense, q: Dense): Dense {
  const r = zeros(p.n, q.m);
  for (let i = 0; i < p.n; i++)
    for (let k = 0; k < p.m; k++) {
      const v = p.a[i * p.m + k];
      if (v === 0) continue;
      const row = k * q.m;
      const to = i * q.m;
      for (let j = 0; j < q.m; j++) r.a[to + j] += v * q.a[row + j];
    }
  return r;
}

/**
 * x with p·x = q by elimination with partial pivoting; null where p is singular.
 *
 * Reference: G. H. Golub and C. F. Van Loan, Matrix Computations, 3rd ed. (1996), Alg. 3.4.1 (from memory).
 */
export function solve(p: Dense, q: Dense): Dense | null {
  const { n } = p;
  const { m } = q;
  const a = Float64Array.from(p.a);
  const b = Float64Array.from(q.a);
  for (let k = 0; k < n; k++) {
    let pivot = k;
    for (let i = k + 1; i < n; i++) if (Math.abs(a[i * n + k]) > Math.abs(a[pivot * n + k])) pivot = i;
    const top = a[pivot * n + k];
    if (!(Math.abs(top) > 0)) return null;
    if (pivot !== k) {
      for (let j = 0; j < n; j++) [a[k * n + j], a[pivot * n + j]] = [a[pivot * n + j], a[k * n + j]];
      for (let j = 0; j < m; j++) [b[k * m + j], b[pivot * m + j]] = [b[pivot * m + j], b[k * m + j]];
    }
    for (let i = k + 1; i < n; i++) {
      const f = a[i * n + k] / top;
      if (f === 0) continue;
      for (let j = k + 1; j < n; j++) a[i * n + j] -= f * a[k * n + j];
      for (let j = 0; j < m; j++) b[i * m + j] -= f * b[k * m + j];
    }
  }
  for (let i = n - 1; i >= 0; i--)
    for (let j = 0; j < m; j++) {
      let s = b[i * m + j];
      for (let k = i + 1; k < n; k++) s -= a[i * n + k] * b[k * m + j];
      b[i * m + j] = s / a[i * n + i];
    }
  return { n, m, a: b };
}

/** Degree of numerator and denominator: at norm ≤ 1/2 the truncation is far below round-off. */
const DEGREE = 8;

/**
 * e^p by scaling and squaring with a diagonal Padé approximant.
 *
 * References: Golub and Van Loan, Alg. 11.3.1; C. Moler and C. Van Loan, SIAM Rev. 45, 3 (2003), method 3 (from memory).
 * @throws RangeError where p is not finite.
 */
export function exponential(p: Dense): Dense {
  const { n } = p;
  let norm = 0;
  for (let i = 0; i < n; i++) {
    let row = 0;
    for (let j = 0; j < n; j++) row += Math.abs(p.a[i * n + j]);
    norm = Math.max(norm, row);
  }
  if (!Number.isFinite(norm)) throw new RangeError('the exponential of a matrix that is not finite');
  const squarings = norm > 0 ? Math.max(0, Math.ceil(Math.log2(norm)) + 1) : 0;
  const scaled: Dense = { n, m: n, a: p.a.map((v) => v * 2 ** -squarings) };
  const top = identity(n);
  const bottom = identity(n);
  let power = identity(n);
  let c = 1;
  for (let k = 1; k <= DEGREE; k++) {
    c *= (DEGREE - k + 1) / (k * (2 * DEGREE - k + 1));
    power = multiply(scaled, power);
    for (let i = 0; i < power.a.length; i++) {
      top.a[i] += c * power.a[i];
      bottom.a[i] += (k % 2 === 0 ? c : -c) * power.a[i];
    }
  }
  let f = solve(bottom, top) as Dense;
  for (let k = 0; k < squarings; k++) f = multiply(f, f);
  return f;
}

/** H = Qᵀ·p·Q upper Hessenberg, with Qᵀ·b and c·Q for the columns b and rows c beside it. */
export interface Hessenberg {
  readonly h: Dense;
  readonly b: Dense;
  readonly c: Dense;
}

/** Householder's reduction. Reference: Golub and Van Loan, Alg. 7.4.2 (from memory). */
export function hessenberg(p: Dense, b: Dense, c: Dense): Hessenberg {
  const { n } = p;
  const h = Float64Array.from(p.a);
  const bb = Float64Array.from(b.a);
  const cc = Float64Array.from(c.a);
  const v = new Float64Array(n);
  for (let k = 0; k + 2 < n; k++) {
    let s = 0;
    for (let i = k + 1; i < n; i++) s += h[i * n + k] ** 2;
    const length = Math.sqrt(s);
    if (length === 0) continue;
    v.fill(0);
    for (let i = k + 1; i < n; i++) v[i] = h[i * n + k];
    v[k + 1] += v[k + 1] >= 0 ? length : -length;
    let vv = 0;
    for (let i = k + 1; i < n; i++) vv += v[i] * v[i];
    fromLeft(h, n, v, vv, k);
    fromLeft(bb, b.m, v, vv, k);
    fromRight(h, n, n, v, vv, k);
    fromRight(cc, c.n, n, v, vv, k);
    for (let i = k + 2; i < n; i++) h[i * n + k] = 0;
  }
  return { h: { n, m: n, a: h }, b: { n, m: b.m, a: bb }, c: { n: c.n, m: n, a: cc } };
}

function fromLeft(a: Float64Array, m: number, v: Float64Array, vv: number, k: number): void {
  const n = v.length;
  for (let j = 0; j < m; j++) {
    let s = 0;
    for (let i = k + 1; i < n; i++) s += v[i] * a[i * m + j];
    s *= 2 / vv;
    for (let i = k + 1; i < n; i++) a[i * m + j] -= s * v[i];
  }
}

function fromRight(a: Float64Array, rows: number, m: number, v: Float64Array, vv: number, k: number): void {
  for (let i = 0; i < rows; i++) {
    let s = 0;
    for (let j = k + 1; j < m; j++) s += v[j] * a[i * m + j];
    s *= 2 / vv;
    for (let j = k + 1; j < m; j++) a[i * m + j] -= s * v[j];
  }
}

/**
 * c·(z·I − H)⁻¹·b for one row of c and every column of b, by Gaussian elimination with row exchanges along the
 * subdiagonal.
 */
export function resolvent({ h, b, c }: Hessenberg, z: Complex, row: number): Complex[] {
  const { n } = h;
  const { m } = b;
  const re = new Float64Array(n * n);
  const im = new Float64Array(n * n);
  const xr = Float64Array.from(b.a);
  const xi = new Float64Array(n * m);
  for (let i = 0; i < n; i++) {
    for (let j = Math.max(0, i - 1); j < n; j++) re[i * n + j] = -h.a[i * n + j];
    re[i * n + i] += z.re;
    im[i * n + i] = z.im;
  }
  for (let k = 0; k + 1 < n; k++) {
    const [a, d] = [k * n + k, (k + 1) * n + k];
    if (Math.abs(re[d]) + Math.abs(im[d]) > Math.abs(re[a]) + Math.abs(im[a])) {
      exchange(re, n, k);
      exchange(im, n, k);
      exchange(xr, m, k);
      exchange(xi, m, k);
    }
    const size = re[a] ** 2 + im[a] ** 2;
    if (size === 0) continue;
    const fr = (re[d] * re[a] + im[d] * im[a]) / size;
    const fi = (im[d] * re[a] - re[d] * im[a]) / size;
    if (fr === 0 && fi === 0) continue;
    take(re, im, n, k, k, fr, fi);
    take(xr, xi, m, k, 0, fr, fi);
  }
  return Array.from({ length: m }, (_, q) => {
    const [vr, vi] = [new Float64Array(n), new Float64Array(n)];
    let [yr, yi] = [0, 0];
    for (let i = n - 1; i >= 0; i--) {
      let [sr, si] = [xr[i * m + q], xi[i * m + q]];
      for (let j = i + 1; j < n; j++) {
        sr -= re[i * n + j] * vr[j] - im[i * n + j] * vi[j];
        si -= re[i * n + j] * vi[j] + im[i * n + j] * vr[j];
      }
      const [pr, pi] = [re[i * n + i], im[i * n + i]];
      const size = pr ** 2 + pi ** 2;
      vr[i] = (sr * pr + si * pi) / size;
      vi[i] = (si * pr - sr * pi) / size;
      yr += c.a[row * n + i] * vr[i];
      yi += c.a[row * n + i] * vi[i];
    }
    return { re: yr, im: yi };
  });
}

function exchange(a: Float64Array, m: number, k: number): void {
  for (let j = 0; j < m; j++) [a[k * m + j], a[(k + 1) * m + j]] = [a[(k + 1) * m + j], a[k * m + j]];
}

/** Row k + 1 less f times row k, from column `from` on. */
function take(
  re: Float64Array,
  im: Float64Array,
  m: number,
  k: number,
  from: number,
  fr: number,
  fi: number,
): void {
  for (let j = from; j < m; j++) {
    const [p, q] = [k * m + j, (k + 1) * m + j];
    re[q] -= fr * re[p] - fi * im[p];
    im[q] -= fr * im[p] + fi * re[p];
  }
}
