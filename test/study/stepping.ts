/** y over x at equilibrium. */
export type Curve = (x: number) => number;

/** Straight lines between measured points, the last one going on. */
export function straight(x: readonly number[], y: readonly number[]): Curve {
  return (v) => {
    let i = 1;
    while (i < x.length - 1 && x[i] < v) i += 1;
    return y[i - 1] + ((y[i] - y[i - 1]) * (v - x[i - 1])) / (x[i] - x[i - 1]);
  };
}

/**
 * Ideal counter-current stages by stepping from the raffinate end, as on a diagram: y_n = f(x_n) and, by the balance
 * around stage n with r = S/F, x_(n−1) = x_n + r·(y_n − y_(n+1)). The raffinate x_N is bisected until x₀ is the feed.
 */
export function stepping(f: Curve, stages: number, r: number, feed: number, solvent = 0): number[] {
  const up = (last: number): number[] => {
    const x = [last];
    let below = solvent;
    for (let n = 0; n < stages; n++) {
      const y = f(x[0]);
      x.unshift(x[0] + r * (y - below));
      below = y;
    }
    return x;
  };
  let lo = 0;
  let hi = feed;
  for (let k = 0; k < 200; k++) {
    const mid = (lo + hi) / 2;
    if (up(mid)[0] < feed) lo = mid;
    else hi = mid;
  }
  return up(hi).slice(1);
}
