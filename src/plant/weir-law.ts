import { add, div, type Expr, max, mul, pow, sub } from '../math/expression.ts';
import { smoothStep } from '../math/shapes.ts';

/** m^½/s: Q = C·L·h^1.5 for a sharp-crested weir that falls free (Francis formula, 1883: 1.84; from memory). */
export const WEIR = 1.84;

/** Flow over a weir of length L under a head h, m³/s; C1 at h = 0 as it is, so nothing is smoothed. */
export const overWeir = (length: Expr, head: Expr): Expr => mul(WEIR, length, pow(max(head, 0), 1.5));

/** Head over a weir of length L that carries a flow Q: (Q/(C·L))^(2/3), m. */
export const headFor = (flow: number, length: number): number => (flow / (WEIR * length)) ** (2 / 3);

/** Level in a settler of area A that holds the volumes given, m. */
export const level = (area: Expr, ...volumes: Expr[]): Expr => div(add(...volumes), area);

/**
 * Level in the aqueous leg: the gravity decanter, z_leg = z_a + z_o·ρ_o/ρ_a − losses, hydrostatic balance of both
 * layers against clear aqueous (W. L. McCabe, J. C. Smith and P. Harriott, Unit Operations of Chemical Engineering,
 * chapter on fluid statics; from memory).
 */
export const legLevel = (aqueousDepth: Expr, organicDepth: Expr, densityRatio: Expr, loss: Expr): Expr =>
  sub(add(aqueousDepth, mul(organicDepth, densityRatio)), loss);

/** Organic share of the underflow when the interface comes down to the port: 1 − S(z_i/z_port). */
export const organicThroughPort = (interfaceLevel: Expr, port: Expr): Expr =>
  sub(1, smoothStep(div(interfaceLevel, port)));

/** m below the organic weir at which aqueous begins to go over it. */
export const NEAR_CREST = 0.05;

/** Aqueous share over the organic weir when the interface rises to its crest. */
export const aqueousOverWeir = (interfaceLevel: Expr, crest: Expr): Expr =>
  smoothStep(div(add(sub(interfaceLevel, crest), NEAR_CREST), NEAR_CREST));
