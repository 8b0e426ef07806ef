/** A stretch of a setting on which all limits are kept. An end that was found has its bracket: kept and not kept. */
export interface Kept {
  readonly from: number;
  readonly to: number;
  /** Null: the scan begins there. */
  readonly fromBracket: readonly [broken: number, kept: number] | null;
  /** Null: the scan ends there. */
  readonly toBracket: readonly [kept: number, broken: number] | null;
}

/** How a setting is tried: an excess above zero is a broken limit. */
export interface Trial {
  /** Whether all is kept, as cheaply as can be. */
  readonly holds: (v: number) => boolean;
  /** Excess at the tolerance of a scan. */
  readonly roughly: (v: number) => number;
  /** Excess at the tolerance of what is told. */
  readonly surely: (v: number) => number;
}

/** Trials by which one edge is narrowed, and by which it is looked for where the rough one was wrong. */
const MOST_TRIALS = 60;

/**
 * The stretches of a setting on which all limits are kept, between the first and the last of the points scanned. What
 * lies wholly between two points is not seen. Each change from point to point is narrowed to a bracket no wider than
 * `precision`: first with rough trials, then both of its ends are tried surely, and moved outwards and narrowed again
 * where that says otherwise, so that every bracket told of has one end kept and one end broken by sure trials.
 */
export function keptStretches(points: readonly number[], trial: Trial, precision: number): Kept[] {
  const held = points.map(trial.holds);
  const list: Kept[] = [];
  let open: Pick<Kept, 'from' | 'fromBracket'> | null = held[0]
    ? { from: points[0], fromBracket: null }
    : null;
  for (let i = 1; i < points.length; i++) {
    if (held[i] === held[i - 1]) continue;
    const edge = settled(points, i, held[i], trial, precision);
    if (held[i]) open = { from: edge[1], fromBracket: edge };
    else if (open) {
      if (edge[0] > open.from) list.push({ ...open, to: edge[0], toBracket: edge });
      open = null;
    }
  }
  if (open) list.push({ ...open, to: points[points.length - 1], toBracket: null });
  return list;
}

/** The bracket of the change between points i − 1 and i; `rises` where it goes from broken to kept. */
function settled(
  points: readonly number[],
  i: number,
  rises: boolean,
  trial: Trial,
  precision: number,
): [number, number] {
  const sign = rises ? -1 : 1;
  const known = new Map<number, number>();
  const surely = (v: number): number => {
    const is = known.get(v) ?? sign * trial.surely(v);
    known.set(v, is);
    return is;
  };
  const rough = (v: number): number => sign * trial.roughly(v);
  const [least, most] = [points[0], points[points.length - 1]];
  let [a, b] = narrowed(rough, points[i - 1], points[i], precision);
  // Outwards, in growing strides, until the sure trials part them.
  for (let stride = precision, k = 0; surely(a) > 0 && a > least && k < MOST_TRIALS; stride *= 2, k++) {
    b = a;
    a = Math.max(least, a - stride);
  }
  for (let stride = precision, k = 0; !(surely(b) > 0) && b < most && k < MOST_TRIALS; stride *= 2, k++) {
    a = b;
    b = Math.min(most, b + stride);
  }
  return b - a > precision ? narrowed(surely, a, b, precision) : [a, b];
}

/**
 * A bracket [a, b] with f(a) ≤ 0 < f(b), no wider than `precision`: regula falsi in its Illinois variant (M. Dowell and
 * P. Jarratt, BIT 11, 168 (1971)) kept off the ends by a third of the precision, with bisection every third time.
 */
function narrowed(f: (v: number) => number, from: number, to: number, precision: number): [number, number] {
  let [a, b] = [from, to];
  let fa = f(a);
  let fb = f(b);
  for (let k = 1, side = 0; b - a > precision && k < MOST_TRIALS; k++) {
    const straight = k % 3 === 0 || !(fa <= 0 && fb > 0) ? Number.NaN : b - (fb * (b - a)) / (fb - fa);
    let v = straight > a && straight < b ? straight : (a + b) / 2;
    v = Math.min(Math.max(v, a + precision / 3), b - precision / 3);
    if (!(v > a && v < b)) break;
    const fv = f(v);
    if (fv > 0) {
      [b, fb] = [v, fv];
      if (side === 1) fa /= 2;
      side = 1;
    } else {
      [a, fa] = [v, fv];
      if (side === -1) fb /= 2;
      side = -1;
    }
  }
  return [a, b];
}

/** Equally spaced points from one value to another, both included. */
export const spread = (from: number, to: number, count: number): number[] =>
  Array.from({ length: count }, (_, i) => (i === count - 1 ? to : from + ((to - from) * i) / (count - 1)));
