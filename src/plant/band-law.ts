import { add, div, type Expr, mul, select, sub } from '../math/expression.ts';
import { smoothStep, steepPower } from '../math/shapes.ts';

/** m of band below which the power law is replaced by a form with a finite slope: 1 mm. */
const THIN = 1e-3;
/** Share of the greatest band thickness at which a settler begins to flood, and the width of the transition. */
export const FLOODS_AT = 0.95;

/**
 * Flow of dispersed phase that coalesces under a band of thickness H, m³/s, the steady law inverted:
 * H = κ·(Q/A)^p, so Q = A·(H/κ)^(1/p); below 1 mm with a finite slope (the raw form stalls an integrator there).
 *
 * Reference: A. D. Ryon, F. L. Daley and R. S. Lowrie, Chem. Eng. Prog. 55(10), 70 (1959); E. Barnea and J. Mizrahi,
 * Trans. Inst. Chem. Eng. 53, 61 (1975). Exponents 2.5 to 7, of the system (from memory).
 */
export const coalescedByPower = (H: Expr, area: Expr, kappa: Expr, p: Expr): Expr =>
  mul(area, steepPower(H, kappa, div(1, p), THIN));

/**
 * The same by the hyperbolic law Q/A = H/(k₁ + k₂·H), whose flux is bounded by 1/k₂: beyond it no steady band exists.
 * Reference: H.-M. Stönner and F. Wöhler, IChemE Symp. Ser. 42, 14.1 (1975); formula from memory.
 */
export const coalescedByHyperbola = (H: Expr, area: Expr, k1: Expr, k2: Expr): Expr =>
  mul(area, select(H, div(H, add(k1, mul(k2, H))), div(H, k1)));

/** Share of the dispersed inflow that leaves with the continuous phase once the band fills its layer of depth H_m. */
export const floodedShare = (H: Expr, greatest: Expr): Expr =>
  smoothStep(div(sub(H, mul(FLOODS_AT, greatest)), mul(1 - FLOODS_AT, greatest)));
