import type { Problem } from './refusal.ts';
import type { Path, Phase } from './scenario.ts';
import type { Kind, Quantity } from './units.ts';

/** What conversions between bases need to know. */
export interface Basis {
  readonly components: readonly string[];
  /** kg/m³ of the pure carrier. */
  readonly densities: Readonly<Partial<Record<Phase, number>>>;
  /** kg/mol */
  readonly molarMasses: Readonly<Record<string, number>>;
}

/** In which a concentration can be stated. */
export const contentKinds: Kind[] = [
  'a concentration',
  'a molar concentration',
  'a mass ratio',
  'a mass fraction',
];

const sum = (list: readonly number[]): number => list.reduce((s, v) => s + v, 0);

/**
 * Concentrations by name → kg/m³ of carrier for every component.
 *
 * Mass ratios X are per carrier: c = X·ρ. Mass fractions are of the whole stream: with T = 1 + ΣX kg of stream per kg
 * of carrier, X_i = w_i·T for those given as fractions, so T = (1 + ΣX of the others)/(1 − Σw).
 */
export function content(
  given: Readonly<Record<string, unknown>>,
  phase: Phase,
  basis: Basis,
  path: Path,
  problems: Problem[],
): number[] {
  const quantities = basis.components.map((name) => given[name] as Quantity | undefined);
  const isFraction = (q: Quantity | undefined): q is Quantity => q?.kind === 'a mass fraction';
  const fractions = sum(quantities.filter(isFraction).map((q) => q.value));
  if (fractions >= 1)
    problems.push({
      path,
      message: 'the mass fractions leave no carrier; together they must come to less than 100 %',
    });
  const at = (k: number): Path => [...path, basis.components[k]];
  const stated = quantities.map((q, k) =>
    q === undefined || isFraction(q)
      ? 0
      : concentration(q, basis.components[k], phase, basis, at(k), problems),
  );
  const rest = sum(stated);
  return quantities.map((q, k) =>
    isFraction(q) ? ofWhole(q.value, 1 - fractions, rest, phase, basis, at(k), problems) : stated[k],
  );
}

/**
 * One concentration in kg/m³ of carrier; complains where the molar mass or the density that it needs is not stated.
 * A mass fraction needs to know what else is dissolved: `rest`, kg/m³.
 */
export function concentration(
  q: Quantity,
  name: string,
  phase: Phase,
  basis: Basis,
  path: Path,
  problems: Problem[],
  rest = 0,
): number {
  switch (q.kind) {
    case 'a molar concentration': {
      const mass = basis.molarMasses[name];
      if (mass !== undefined) return q.value * mass;
      const message = `a molar concentration needs molar_masses.${name}, such as '63.55 g/mol'`;
      problems.push({ path, message });
      return Number.NaN;
    }
    case 'a mass ratio':
      return q.value * density(q.kind, phase, basis, path, problems);
    case 'a mass fraction':
      if (q.value >= 1)
        problems.push({ path, message: 'the mass fraction leaves no carrier; it must be less than 100 %' });
      return ofWhole(q.value, 1 - q.value, rest, phase, basis, path, problems);
    default:
      return q.value;
  }
}

function ofWhole(
  w: number,
  carrierShare: number,
  rest: number,
  phase: Phase,
  basis: Basis,
  path: Path,
  problems: Problem[],
): number {
  return (w * (density('a mass fraction', phase, basis, path, problems) + rest)) / carrierShare;
}

function density(what: Kind, phase: Phase, basis: Basis, path: Path, problems: Problem[]): number {
  const stated = basis.densities[phase];
  if (stated !== undefined) return stated;
  problems.push({ path, message: `${what} needs densities.${phase}, such as '1000 kg/m^3'` });
  return Number.NaN;
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
  return q.value / (density('a flow by mass', phase, basis, path, problems) + sum(contents));
}
