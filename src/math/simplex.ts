/** Rounds after which the search ends wherever it is. */
const MOST = 600;
const CLOSE = 1e-9;

/**
 * A minimum of f near `start` by the downhill simplex of J. A. Nelder and R. Mead, Comput. J. 7, 308 (1965); first steps
 * of `step` in each direction. A value that is no number counts as infinitely bad.
 */
export function simplex(
  f: (x: readonly number[]) => number,
  start: readonly number[],
  step: number,
): number[] {
  const worth = (x: number[]): { x: number[]; f: number } => {
    const v = f(x);
    return { x, f: Number.isNaN(v) ? Infinity : v };
  };
  const n = start.length;
  const points = [worth([...start])];
  for (let i = 0; i < n; i++) points.push(worth(start.map((v, k) => (k === i ? v + step : v))));
  for (let round = 0; round < MOST; round++) {
    points.sort((a, b) => a.f - b.f);
    const [best, worst] = [points[0], points[n]];
    if (Math.abs(worst.f - best.f) <= CLOSE * (Math.abs(best.f) + 1e-300) && spread(points) < 1e-7) break;
    const middle = Array.from(
      { length: n },
      (_, k) => points.slice(0, n).reduce((s, p) => s + p.x[k], 0) / n,
    );
    const along = (t: number) => worth(middle.map((m, k) => m + t * (worst.x[k] - m)));
    const mirrored = along(-1);
    if (mirrored.f < best.f) {
      const farther = along(-2);
      points[n] = farther.f < mirrored.f ? farther : mirrored;
    } else if (mirrored.f < points[n - 1].f) points[n] = mirrored;
    else {
      const nearer = mirrored.f < worst.f ? along(-0.5) : along(0.5);
      if (nearer.f < Math.min(worst.f, mirrored.f)) points[n] = nearer;
      else
        for (let i = 1; i <= n; i++)
          points[i] = worth(points[i].x.map((v, k) => best.x[k] + (v - best.x[k]) / 2));
    }
  }
  return points.sort((a, b) => a.f - b.f)[0].x;
}

const spread = (points: readonly { x: number[] }[]): number =>
  Math.max(
    ...points[0].x.map(
      (_, k) => Math.max(...points.map((p) => p.x[k])) - Math.min(...points.map((p) => p.x[k])),
    ),
  );
