/**
 * The joint between plant and solver: dx/dt = f(x, w, p), y = g(x, w, p), in SI units.
 *
 * A System is autonomous and immutable; it knows neither time nor scenario. All that moves during a run (feeds,
 * pumps, modes) comes in through the inputs w.
 */
export type F = Float64Array;

export interface Named {
  readonly path: string;
  readonly unit: string;
  /** A typical magnitude, in `unit`: tolerances and residuals are measured against it. */
  readonly scale: number;
}

export interface Place extends Named {
  readonly kind: 'amount' | 'volume' | 'controller' | 'total';
  /** The least value that makes sense; a trial below it by more than ten absolute tolerances is rejected. */
  readonly floor: number | null;
}

/** Compressed sparse rows: the columns of row i are `column[rowStart[i] … rowStart[i + 1])`, ascending. */
export interface Pattern {
  readonly rowStart: Int32Array;
  readonly column: Int32Array;
}

export interface Guard {
  readonly name: string;
  /** Which way the guard value must cross zero: upwards, downwards, or either. */
  readonly direction: 1 | -1 | 0;
  readonly message: string;
  /** Whether it acts at the start if it is past its bound there; otherwise only a crossing counts. */
  readonly fromStart?: boolean;
  readonly action: 'report' | 'stop' | { readonly set: readonly (readonly [input: number, value: number])[] };
}

/** How a place is found at steady state. */
export type SteadyRow =
  | 'free'
  /** Keeps its value: totals, volumes that only drift, contents that only circulate. */
  | 'hold'
  /** Stationary composition in a volume (a place) that drifts: dm/dt − (m/V)·dV/dt = 0. */
  | { readonly followsVolume: number }
  /** One row of a closed set: the sum of these places keeps its value. */
  | { readonly keepsSumOf: readonly number[] };

export interface System {
  /** Names the structure: saved states and workers are checked against it. */
  readonly topology: string;
  readonly places: readonly Place[];
  readonly inputs: readonly Named[];
  readonly parameters: readonly Named[];
  readonly outputs: readonly Named[];
  rhs(x: F, w: F, p: F, dx: F): void;
  readonly A: Pattern;
  /** ∂f/∂x on the pattern A. */
  jacobian(x: F, w: F, p: F, values: F): void;
  readonly B: Pattern;
  /** ∂f/∂w on the pattern B; along a ramp f_t = B·(dw/dt). */
  byInput(x: F, w: F, p: F, values: F): void;
  output(x: F, w: F, p: F, y: F): void;
  readonly C: Pattern;
  readonly D: Pattern;
  /** ∂g/∂x on C and ∂g/∂w on D. */
  byOutput(x: F, w: F, p: F, c: F, d: F): void;
  readonly guards: readonly Guard[];
  /** Guard values; each is located on dense output where it crosses zero. */
  guard(x: F, w: F, p: F, g: F): void;
  /** Each `weights · x` is constant in a run, whatever the inputs do. */
  readonly conserved: readonly { readonly name: string; readonly weights: F }[];
  readonly steady: readonly SteadyRow[];
  readonly native?: Native | undefined;
}

/** dx/dt as machine code, for who works in the same memory: inputs and parameters as the last call of `rhs` left them. */
export interface Native {
  readonly memory: WebAssembly.Memory;
  /** Addresses in bytes: what the functions are called with, and beyond it where x and dx/dt stand. */
  readonly base: number;
  readonly x: number;
  readonly change: number;
  readonly functions: readonly ((base: number) => void)[];
}

/** Inputs over time: piecewise linear between its times, right limits at them. */
export interface Schedule {
  /** Segment boundaries [s], strictly increasing; the first is the start, the last the horizon. */
  readonly times: F;
  /** w at time t, taken in segment `segment` (so both limits at a boundary can be had). */
  value(segment: number, t: number, w: F): void;
  /** dw/dt in the segment. */
  slope(segment: number, dw: F): void;
}
