import { add, div, type Expr, mul, pow, select, sqrt, sub } from '../../math/expression.ts';
import { steepPower } from '../../math/shapes.ts';
import type { Law } from '../../scenario/scenario.ts';
import type { LawKind } from './law.ts';

type Freundlich = Extract<Law, { law: 'freundlich' }>;

/** kg/m³ below which the power with the infinite slope at zero is replaced. Far below any assay. */
const NEAR_ZERO = 1e-5;

const steep = (c: Expr, k: Expr, s: Expr): Expr => steepPower(c, k, s, NEAR_ZERO);

/** The exact inverse of `steep`, piece by piece: y ↦ c. */
function gentle(y: Expr, k: Expr, s: Expr): Expr {
  const top = pow(div(NEAR_ZERO, k), s);
  const v = div(y, top);
  const two = sub(2, s);
  // The root of (s − 1)x² + (2 − s)x = v that vanishes with v, in the form without cancellation.
  const root = sqrt(add(mul(two, two), mul(4, sub(s, 1), v)));
  const x = div(mul(2, v), add(two, root));
  return select(sub(y, top), mul(k, pow(y, div(1, s))), mul(NEAR_ZERO, select(y, x, div(v, two))));
}

/**
 * Freundlich (1907): c_o = K·c_aⁿ, concentrations in kg/m³ (= g/L). Whichever direction has the infinite slope at
 * zero is regularised there, and the other is its exact inverse.
 */
export const freundlich: LawKind<Freundlich> = {
  numbers: (l) => [
    { name: 'coefficient', unit: '', value: l.coefficient },
    { name: 'exponent', unit: '', value: l.exponent },
  ],
  structure: (l) => (l.exponent < 1 ? 'concave' : 'convex'),
  aqueous({ solute, law, q: [K, n] }, at) {
    const c = at.organic[solute];
    if (law.exponent === 1) return div(c, K);
    // Concave: c_o = (c_a/k)ⁿ with k = K^(−1/n).
    return law.exponent < 1 ? gentle(c, pow(K, div(-1, n)), n) : steep(c, K, div(1, n));
  },
  organic({ solute, law, q: [K, n] }, at) {
    const c = at.aqueous[solute];
    if (law.exponent === 1) return mul(c, K);
    return law.exponent < 1 ? steep(c, pow(K, div(-1, n)), n) : gentle(c, K, div(1, n));
  },
};
