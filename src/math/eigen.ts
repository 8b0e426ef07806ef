/** Eigenvalues and vectors of small dense matrices, for the projections of large sparse ones. */

/** A complex number or, by element, a complex vector. */
export interface Complex<T = number> {
  readonly re: T;
  readonly im: T;
}

const EPSILON = Number.EPSILON;
/** QR steps for one eigenvalue; three are usual. */
const MOST_STEPS = 60;
/** Steps without success after which the shift is moved off its course. */
const STALLED = 11;

/**
 * All eigenvalues of a real upper Hessenberg matrix of order n (row-major, `stride` apart), in no particular order, by
 * the single-shift QR algorithm in complex arithmetic with Givens rotations and Wilkinson's shift.
 *
 * Reference: G. H. Golub and C. F. Van Loan, Matrix Computations, 3rd ed. (1996), Sec. 7.4-7.5 (from memory).
 * Null where it does not converge, which no finite matrix has been seen to do.
 */
export function hessenbergEigenvalues(h: Float64Array, n: number, stride: number): Complex[] | null {
  const re = new Float64Array(n * n);
  const im = new Float64Array(n * n);
  for (let i = 0; i < n; i++) for (let j = Math.max(0, i - 1); j < n; j++) re[i * n + j] = h[i * stride + j];
  const size = (k: number): number => Math.abs(re[k]) + Math.abs(im[k]);
  const found: Complex[] = [];
  let last = n - 1;
  for (let steps = 0; last >= 0; ) {
    let first = last;
    while (first > 0) {
      const below = first * n + first - 1;
      const beside = size(below - n) + size(first * n + first);
      if (size(below) <= EPSILON * (beside || 1e-300)) break;
      first -= 1;
    }
    if (first === last) {
      found.push({ re: re[last * n + last], im: im[last * n + last] });
      last -= 1;
      steps = 0;
      continue;
    }
    steps += 1;
    if (steps > MOST_STEPS) return null;
    qrStep(re, im, n, first, last, steps % STALLED === 0);
  }
  return found;
}

/** One step of QR with a shift on rows and columns first … last. */
function qrStep(
  re: Float64Array,
  im: Float64Array,
  n: number,
  first: number,
  last: number,
  odd: boolean,
): void {
  const d = last * n + last;
  const shift = odd
    ? { re: re[d] + Math.abs(re[d - 1]) + Math.abs(im[d - 1]), im: im[d] }
    : wilkinson(re, im, d, n);
  for (let k = first; k <= last; k++) {
    re[k * n + k] -= shift.re;
    im[k * n + k] -= shift.im;
  }
  // Rotations G with G·(a, b)ᵀ = (r, 0)ᵀ: c real, s complex, rows combined as c·x + s·y and −s̄·x + c·y.
  const c = new Float64Array(last + 1);
  const sRe = new Float64Array(last + 1);
  const sIm = new Float64Array(last + 1);
  for (let k = first; k < last; k++) {
    const a = k * n + k;
    const b = a + n;
    const [ar, ai, br, bi] = [re[a], im[a], re[b], im[b]];
    const sizeA = Math.hypot(ar, ai);
    const r = Math.hypot(sizeA, br, bi);
    if (r === 0) {
      c[k] = 1;
      continue;
    }
    // With a = |a|·u: c = |a|/r, s = u·b̄/r.
    const [ur, ui] = sizeA === 0 ? [1, 0] : [ar / sizeA, ai / sizeA];
    c[k] = sizeA / r;
    sRe[k] = (ur * br + ui * bi) / r;
    sIm[k] = (ui * br - ur * bi) / r;
    for (let j = k; j <= last; j++) {
      const x = k * n + j;
      const y = x + n;
      const [xr, xi, yr, yi] = [re[x], im[x], re[y], im[y]];
      re[x] = c[k] * xr + sRe[k] * yr - sIm[k] * yi;
      im[x] = c[k] * xi + sRe[k] * yi + sIm[k] * yr;
      re[y] = c[k] * yr - sRe[k] * xr - sIm[k] * xi;
      im[y] = c[k] * yi - sRe[k] * xi + sIm[k] * xr;
    }
  }
  for (let k = first; k < last; k++)
    for (let i = first; i <= Math.min(last, k + 1); i++) {
      const x = i * n + k;
      const y = x + 1;
      const [xr, xi, yr, yi] = [re[x], im[x], re[y], im[y]];
      // From the right by the conjugate transpose: columns combined as c·x + s̄·y and −s·x + c·y.
      re[x] = c[k] * xr + sRe[k] * yr + sIm[k] * yi;
      im[x] = c[k] * xi + sRe[k] * yi - sIm[k] * yr;
      re[y] = c[k] * yr - sRe[k] * xr + sIm[k] * xi;
      im[y] = c[k] * yi - sRe[k] * xi - sIm[k] * xr;
    }
  for (let k = first; k <= last; k++) {
    re[k * n + k] += shift.re;
    im[k * n + k] += shift.im;
  }
}

/** The eigenvalue of the last two by two block that is nearer to its last entry. */
function wilkinson(re: Float64Array, im: Float64Array, d: number, n: number): Complex {
  const a = d - n - 1;
  const half = { re: (re[a] - re[d]) / 2, im: (im[a] - im[d]) / 2 };
  const bc = times({ re: re[d - n], im: im[d - n] }, { re: re[d - 1], im: im[d - 1] });
  const square = times(half, half);
  const root = squareRoot({ re: square.re + bc.re, im: square.im + bc.im });
  // Both roots of μ² − 2·half·μ − bc = 0 lie at half ± root from the last entry; the smaller one as −bc/(the larger).
  const same = half.re * root.re + half.im * root.im >= 0;
  const large = same
    ? { re: half.re + root.re, im: half.im + root.im }
    : { re: half.re - root.re, im: half.im - root.im };
  const size = large.re ** 2 + large.im ** 2;
  if (size === 0) return { re: re[d], im: im[d] };
  const small = times(bc, { re: -large.re / size, im: large.im / size });
  return { re: re[d] + small.re, im: im[d] + small.im };
}

const times = (a: Complex, b: Complex): Complex => ({
  re: a.re * b.re - a.im * b.im,
  im: a.re * b.im + a.im * b.re,
});

function squareRoot({ re, im }: Complex): Complex {
  const size = Math.hypot(re, im);
  const r = Math.sqrt((size + Math.abs(re)) / 2);
  if (r === 0) return { re: 0, im: 0 };
  if (re >= 0) return { re: r, im: im / (2 * r) };
  return { re: Math.abs(im) / (2 * r), im: im < 0 ? -r : r };
}

/**
 * Eigenvector of a real upper Hessenberg matrix for an eigenvalue that is known to many digits, of length 1, by
 * inverse iteration.
 *
 * Reference: Golub and Van Loan, Sec. 7.6.1 (from memory).
 */
export function hessenbergVector(
  h: Float64Array,
  n: number,
  stride: number,
  value: Complex,
): Complex<Float64Array> {
  const re = new Float64Array(n * n);
  const im = new Float64Array(n * n);
  let norm = 0;
  for (let i = 0; i < n; i++)
    for (let j = Math.max(0, i - 1); j < n; j++) {
      re[i * n + j] = h[i * stride + j];
      norm = Math.max(norm, Math.abs(re[i * n + j]));
    }
  // A little off the eigenvalue: exactly on it there would be nothing to divide by.
  const off = 10 * EPSILON * (norm || 1);
  for (let i = 0; i < n; i++) {
    re[i * n + i] -= value.re + off;
    im[i * n + i] -= value.im;
  }
  const swapped = new Uint8Array(n);
  const factor: Complex[] = [];
  for (let k = 0; k + 1 < n; k++) {
    const [a, b] = [k * n + k, (k + 1) * n + k];
    if (Math.hypot(re[b], im[b]) > Math.hypot(re[a], im[a])) {
      swapped[k] = 1;
      for (let j = k; j < n; j++) {
        [re[k * n + j], re[(k + 1) * n + j]] = [re[(k + 1) * n + j], re[k * n + j]];
        [im[k * n + j], im[(k + 1) * n + j]] = [im[(k + 1) * n + j], im[k * n + j]];
      }
    }
    const f = quotient({ re: re[b], im: im[b] }, { re: re[a], im: im[a] }, off);
    factor.push(f);
    for (let j = k; j < n; j++) {
      const [x, y] = [k * n + j, (k + 1) * n + j];
      const p = times(f, { re: re[x], im: im[x] });
      re[y] -= p.re;
      im[y] -= p.im;
    }
  }
  const v = { re: new Float64Array(n).fill(1), im: new Float64Array(n) };
  for (let pass = 0; pass < 3; pass++) {
    if (pass > 0)
      for (let k = 0; k + 1 < n; k++) {
        if (swapped[k]) {
          [v.re[k], v.re[k + 1]] = [v.re[k + 1], v.re[k]];
          [v.im[k], v.im[k + 1]] = [v.im[k + 1], v.im[k]];
        }
        const p = times(factor[k], { re: v.re[k], im: v.im[k] });
        v.re[k + 1] -= p.re;
        v.im[k + 1] -= p.im;
      }
    for (let i = n - 1; i >= 0; i--) {
      let [sr, si] = [v.re[i], v.im[i]];
      for (let j = i + 1; j < n; j++) {
        const p = times({ re: re[i * n + j], im: im[i * n + j] }, { re: v.re[j], im: v.im[j] });
        sr -= p.re;
        si -= p.im;
      }
      const q = quotient({ re: sr, im: si }, { re: re[i * n + i], im: im[i * n + i] }, off);
      v.re[i] = q.re;
      v.im[i] = q.im;
    }
    let length = 0;
    for (let i = 0; i < n; i++) length = Math.hypot(length, v.re[i], v.im[i]);
    for (let i = 0; i < n; i++) {
      v.re[i] /= length;
      v.im[i] /= length;
    }
  }
  return v;
}

function quotient(a: Complex, b: Complex, least: number): Complex {
  const size = b.re ** 2 + b.im ** 2;
  if (size < least ** 2) return { re: a.re / least, im: a.im / least };
  return times(a, { re: b.re / size, im: -b.im / size });
}
