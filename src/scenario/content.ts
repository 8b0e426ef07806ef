import type { Problem } from './refusal.ts';
import type { Path, Phase } from './scenario.ts';
import type { Quantity } from './units.ts';

/** What conversions between bases need to know. */
export interface Basis {
  readonly components: readonly string[];
  /** kg/m³ of the pure carrier. */
  readonly densities: Readonly<Partial<Record<Phase, number>>>;
  /** kg/mol */
  readonly molarMasses: Readonly<Record<string, number>>;
}

/**
 * Concentrations by name → kg/m³ of carrier for every component.
 *
 * Mass ratios X are per carrier: c = X·ρ. Mass fractions are of the whole stream, so X_i = w_i/(1 − Σw) with the sum
 * over all fractions given. Molar concentrations take a molar mass.
 */
export function content(
  given: Readonly<Record<string, unknown>>,
  phase: Phase,
  basis: Basis,
  path: Path,
  problems: Problem[],
): number[] {
  const quantities = basis.components.map((name) => given[name] as Quantity | undefined);
  const fractions = quantities.reduce((sum, q) => sum + (q?.kind === 'a mass fraction' ? q.value : 0), 0);
  if (fractions >= 1) problems.push({ path, message: 'the mass fractions leave no carrier' });
  return quantities.map((q, k) =>
    q === undefined
      ? 0
      : concentration(
          q,
          basis.components[k],
          phase,
          basis,
          [...path, basis.components[k]],
          problems,
          fractions,
        ),
  );
}

/** One concentration in kg/m³; complains where the molar mass or the density that it needs is not stated. */
export function concentration(
  q: Quantity,
  name: string,
  phase: Phase,
  basis: Basis,
  path: Path,
  problems: Problem[],
  fractions = q.kind === 'a mass fraction' ? q.value : 0,
): number {
  if (q.kind === 'a concentration') return q.value;
  if (q.kind === 'a molar concentration') {
    const mass = basis.molarMasses[name];
    if (mass !== undefined) return q.value * mass;
    problems.push({
      path,
      message: `a molar concentration needs molar_masses.${name}, such as '63.55 g/mol'`,
    });
    return Number.NaN;
  }
  const density = basis.densities[phase];
  if (density === undefined) {
    problems.push({ path, message: `${q.kind} needs densities.${phase}, such as '1000 kg/m^3'` });
    return Number.NaN;
  }
  return density * (q.kind === 'a mass ratio' ? q.value : q.value / (1 - fractions));
}

/** Carrier flow in m³/s; a mass flow is of the whole stream: M = Q·(ρ + Σc). */
export function carrierFlow(
  q: Quantity,
  phase: Phase,
  contents: readonly number[],
  basis: Basis,
  path: Path,
  problems: Problem[],
): number {
  if (q.kind === 'a flow by volume') return q.value;
  const density = basis.densities[phase];
  if (density !== undefined) return q.value / (density + contents.reduce((s, c) => s + c, 0));
  problems.push({ path, message: `a flow by mass needs densities.${phase}, such as '1000 kg/m^3'` });
  return Number.NaN;
}
