import { add, constant, div, type Expr, exp, max, mul, pow, select, sqrt, sub } from '../math/expression.ts';
import { smoothStep } from '../math/shapes.ts';
import type { DropSizeName } from '../scenario/plain.ts';

/** m/s² */
const GRAVITY = 9.80665;
/** Hold-up below which φ^(−1/2) is not followed: drops that are hardly there need no larger coefficient. */
const LEAST_HOLDUP = 0.01;

/** Physical properties of the two phases and the agitator, SI, as expressions. */
export interface Stirred {
  /** 1/s */
  readonly speed: Expr;
  /** m: impeller, vessel. */
  readonly diameter: Expr;
  readonly vessel: Expr;
  readonly powerNumber: Expr;
  /** kg/m³, Pa·s of the continuous and the dispersed phase. */
  readonly continuousDensity: Expr;
  readonly dispersedDensity: Expr;
  readonly continuousViscosity: Expr;
  readonly dispersedViscosity: Expr;
  /** N/m */
  readonly tension: Expr;
  /** Dispersed and continuous share of the mixer. */
  readonly dispersed: Expr;
  readonly continuous: Expr;
}

/** Sauter mean diameter d₃₂/D as a function of We = ρ_c·N²·D³/σ and the dispersed share φ. */
type DropSize = (we: Expr, phi: Expr) => Expr;

const linear =
  (constant: number, holdup: number): DropSize =>
  (we, phi) =>
    mul(constant, add(1, mul(holdup, phi)), pow(we, -0.6));

/** One value below x = 0, another above x = 1: published constants that jump must not do so inside an equation. */
const mixed = (low: Expr, high: Expr, x: Expr): Expr => add(low, mul(smoothStep(x), sub(high, low)));

/**
 * Published drop-size correlations, by first authors. All constants from memory; they differ among each other by a
 * factor of 1.5 to 2, so absolute sizes want a measurement, while the scaling with speed, size and tension holds.
 */
export const dropSizes = {
  // V. G. Mlynek and W. Resnick, AIChE J. 18, 122 (1972).
  'mlynek-resnick': linear(0.058, 5.4),
  // H. T. Chen and S. Middleman, AIChE J. 13, 989 (1967): dilute.
  'chen-middleman': linear(0.053, 0),
  // F. B. Sprow, Chem. Eng. Sci. 22, 435 (1967): dilute.
  sprow: linear(0.0524, 0),
  // P. H. Calderbank, Trans. Inst. Chem. Eng. 36, 443 (1958): six-blade turbine, four-blade paddle.
  'calderbank-turbine': linear(0.06, 9),
  'calderbank-paddle': linear(0.06, 3.75),
  // D. E. Brown and K. Pitt (1970), journal unknown to us.
  'brown-pitt': linear(0.051, 3.14),
  // J. W. van Heuven and W. J. Beek (1971), journal unknown to us.
  'van-heuven-beek': linear(0.047, 2.5),
  // C. A. Coulaloglou and L. L. Tavlarides, AIChE J. 22, 289 (1976).
  'coulaloglou-tavlarides': linear(0.081, 4.47),
  // S. Gnanasundaram, T. E. Degaleesan and G. S. Laddha, Can. J. Chem. Eng. 57, 141 (1979): two ranges that part at
  // We = 10⁴ with a jump, taken over 0.9 to 1.1 of that.
  gnanasundaram: (we: Expr, phi: Expr): Expr =>
    mul(mixed(mul(0.052, exp(mul(4, phi))), constant(0.39), div(sub(we, 0.9e4), 0.2e4)), pow(we, -0.6)),
} satisfies Record<DropSizeName, DropSize>;

/** d₃₂ in m. */
export function dropDiameter(name: DropSizeName, s: Stirred): Expr {
  const we = div(mul(s.continuousDensity, s.speed, s.speed, pow(s.diameter, 3)), s.tension);
  return mul(s.diameter, dropSizes[name](we, s.dispersed));
}

/** ρ_M = φ_c·ρ_c + φ_d·ρ_d. */
export const mixtureDensity = (s: Stirred): Expr =>
  add(mul(s.continuous, s.continuousDensity), mul(s.dispersed, s.dispersedDensity));

/** μ_M = (μ_c/φ_c)(1 + 1.5·μ_d·φ_d/(μ_c + μ_d)). T. Vermeulen et al., Chem. Eng. Prog. 51, 85 (1955); from memory. */
export function mixtureViscosity(s: Stirred): Expr {
  const drops = div(
    mul(1.5, s.dispersedViscosity, s.dispersed),
    add(s.continuousViscosity, s.dispersedViscosity),
  );
  return mul(div(s.continuousViscosity, max(s.continuous, LEAST_HOLDUP)), add(1, drops));
}

/** P = Np·ρ_M·N³·D⁵ in W (fully turbulent, baffled): the definition of the power number. */
export const power = (s: Stirred): Expr =>
  mul(s.powerNumber, mixtureDensity(s), pow(s.speed, 3), pow(s.diameter, 5));

/**
 * Least speed for complete dispersion, 1/s:
 * N²·ρ_M·D/(g·Δρ) = 1.03·(T/D)^2.76·φ^0.106·(μ_M²·σ/(D⁵·ρ_M·g²·Δρ²))^0.084.
 * A. H. P. Skelland and G. G. Ramsay, Ind. Eng. Chem. Res. 26, 77 (1987), six-flat-blade turbine; from memory.
 */
export function leastSpeed(s: Stirred): Expr {
  const rho = mixtureDensity(s);
  const mu = mixtureViscosity(s);
  const d = sub(s.continuousDensity, s.dispersedDensity);
  const difference = max(select(d, d, mul(-1, d)), 1e-3);
  const group = div(
    mul(mu, mu, s.tension),
    mul(pow(s.diameter, 5), rho, GRAVITY * GRAVITY, difference, difference),
  );
  const froude = mul(
    1.03,
    pow(div(s.vessel, s.diameter), 2.76),
    pow(max(s.dispersed, LEAST_HOLDUP), 0.106),
    pow(group, 0.084),
  );
  return sqrt(div(mul(froude, GRAVITY, difference), mul(rho, s.diameter)));
}

/** 0 where the agitator does not disperse at all, 1 where it disperses everything: S((N/N_min − 0.5)/0.5). */
export const dispersing = (s: Stirred): Expr => smoothStep(div(sub(div(s.speed, leastSpeed(s)), 0.5), 0.5));

/** Dispersed side, m/s: Sh_d = k_d·d₃₂/D_d = 6.6, a rigid drop after long times (R. E. Treybal; 2π²/3 = 6.58). */
export const dispersedFilm = (d32: Expr, diffusivity: Expr): Expr => div(mul(6.6, diffusivity), d32);

/**
 * Continuous side, m/s: Sh_c = 1.237e-5·Sc^(1/3)·Re^(2/3)·φ^(−1/2)·Fr^(5/12)·(D/d₃₂)²·(d₃₂/T)^(1/2)·Eo^(5/4), with
 * Re = N·D²·ρ_c/μ_c, Fr = N²·D/g, Eo = ρ_d·d₃₂²·g/σ, Sh_c = k_c·d₃₂/D_c; not below pure diffusion, Sh_c = 2.
 * A. H. P. Skelland and L. T. Moeti, Ind. Eng. Chem. Res. 29, 2258 (1990); from memory.
 */
export function continuousFilm(s: Stirred, d32: Expr, diffusivity: Expr): Expr {
  const sc = div(s.continuousViscosity, mul(s.continuousDensity, diffusivity));
  const re = div(mul(s.speed, s.diameter, s.diameter, s.continuousDensity), s.continuousViscosity);
  const fr = div(mul(s.speed, s.speed, s.diameter), GRAVITY);
  const eo = div(mul(s.dispersedDensity, d32, d32, GRAVITY), s.tension);
  const ratio = div(s.diameter, d32);
  const sh = mul(
    1.237e-5,
    pow(sc, 1 / 3),
    pow(re, 2 / 3),
    pow(max(s.dispersed, LEAST_HOLDUP), -0.5),
    pow(fr, 5 / 12),
    mul(ratio, ratio),
    sqrt(div(d32, s.vessel)),
    pow(eo, 1.25),
  );
  return div(mul(max(sh, 2), diffusivity), d32);
}

/** a = 6·φ_d/d₃₂, 1/m: exact for the Sauter mean. Vanishes with either phase, below a continuous share of 5 %. */
export const specificArea = (s: Stirred, d32: Expr): Expr =>
  div(mul(6, s.dispersed, smoothStep(div(s.continuous, 0.05))), d32);
