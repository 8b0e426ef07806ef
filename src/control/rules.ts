/** First order plus dead time: k·e^(−θs)/(1 + T·s). Here k > 0: the sense is the action's business. */
export interface Fopdt {
  readonly gain: number;
  readonly lag: number;
  readonly delay: number;
}

export interface Settings {
  readonly gain: number;
  readonly integralTime: number;
  readonly derivativeTime: number;
}

const pi = (gain: number, integralTime: number): Settings => ({ gain, integralTime, derivativeTime: 0 });

/**
 * SIMC: Kc = T/(k(τc + θ)), Ti = min(T, 4(τc + θ)); tight control τc = θ. S. Skogestad, J. Process Control 13, 291 (2003).
 */
export const simc = ({ gain, lag, delay }: Fopdt, tauc = delay): Settings =>
  pi(lag / (gain * (tauc + delay)), Math.min(lag, 4 * (tauc + delay)));

/** Improved SIMC: T + θ/3 in place of T. C. Grimholt and S. Skogestad, J. Process Control 70, 36 (2018). */
export const improvedSimc = (p: Fopdt): Settings => simc({ ...p, lag: p.lag + p.delay / 3 }, p.delay);

/**
 * Lambda: Kc = T/(k(λ + θ)), Ti = T. D. E. Rivera, M. Morari and S. Skogestad, Ind. Eng. Chem. Process Des. Dev. 25, 252
 * (1986) (from memory). λ = T by default: as fast as the plant itself, but never faster than 3 θ allows (common practice).
 */
export const lambda = ({ gain, lag, delay }: Fopdt, closed = Math.max(lag, 3 * delay)): Settings =>
  pi(lag / (gain * (closed + delay)), lag);

/**
 * AMIGO PI. K. J. Åström and T. Hägglund, J. Process Control 14, 635 (2004).
 */
export const amigo = ({ gain: k, lag: T, delay: L }: Fopdt): Settings =>
  pi(
    0.15 / k + ((0.35 - (L * T) / (L + T) ** 2) * T) / (k * L),
    0.35 * L + (13 * L * T * T) / (T * T + 12 * L * T + 7 * L * L),
  );

/** AMIGO PID, same source. */
export const amigoPid = ({ gain: k, lag: T, delay: L }: Fopdt): Settings => ({
  gain: (0.2 + (0.45 * T) / L) / k,
  integralTime: (L * (0.4 * L + 0.8 * T)) / (L + 0.1 * T),
  derivativeTime: (0.5 * L * T) / (0.3 * L + T),
});

/** J. G. Ziegler and N. B. Nichols, Trans. ASME 64, 759 (1942), from the ultimate gain and period. For reference only. */
export const zieglerNichols = (ultimateGain: number, period: number): Settings =>
  pi(ultimateGain / 2.2, period / 1.2);
export const zieglerNicholsPid = (ultimateGain: number, period: number): Settings => ({
  gain: ultimateGain / 1.7,
  integralTime: period / 2,
  derivativeTime: period / 8,
});
/** The same from the reaction curve. */
export const zieglerNicholsCurve = ({ gain: k, lag: T, delay: L }: Fopdt): Settings =>
  pi((0.9 * T) / (k * L), 3.3 * L);

/**
 * G. H. Cohen and G. A. Coon, Trans. ASME 75, 827 (1953), PI. For reference only. The gain is the usual 0.9 + r/12; one
 * handbook page prints 1.1.
 */
export function cohenCoon({ gain: k, lag: T, delay: L }: Fopdt): Settings {
  const r = L / T;
  return pi((T / (k * L)) * (0.9 + r / 12), (L * (30 + 3 * r)) / (9 + 20 * r));
}

/** B. D. Tyreus and W. L. Luyben, Ind. Eng. Chem. Res. 31, 2625 (1992) (from memory). */
export const tyreusLuyben = (ultimateGain: number, period: number): Settings =>
  pi(ultimateGain / 3.2, 2.2 * period);
