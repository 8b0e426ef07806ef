import { type Basis, concentration } from './content.ts';
import { parseFormula } from './formula.ts';
import { formulaName, isBuiltIn } from './names.ts';
import { hint } from './nearest.ts';
import type { Problem } from './refusal.ts';
import type { Law, Path } from './scenario.ts';
import type { RawScenario } from './schema.ts';
import { show } from './show.ts';
import { readTableLaw } from './table-law.ts';

type RawTrain = RawScenario['trains'][string];
export type RawLaw = NonNullable<RawTrain['equilibrium']>[string];

export interface LawContext {
  readonly solutes: readonly string[];
  readonly species: readonly string[];
  readonly basis: Basis;
  readonly folder: string;
}

/** A law as the scenario gives it → numbers in SI; complaints with their place. */
export function readLaw(
  raw: RawLaw,
  solute: string,
  c: LawContext,
  path: Path,
  problems: Problem[],
): Law | null {
  switch (raw.law) {
    case 'ratio':
      return { law: 'ratio', ratio: raw.ratio.value };
    case 'langmuir': {
      const at = [...path, 'capacity'];
      const capacity = concentration(raw.capacity, solute, 'organic', c.basis, at, problems);
      return { law: 'langmuir', capacity, affinity: raw.affinity.value };
    }
    case 'freundlich':
      return { law: 'freundlich', coefficient: raw.coefficient.value, exponent: raw.exponent.value };
    case 'table':
      return readTableLaw(raw, solute, c, path, problems);
    case 'exchange':
      return readExchange(raw, c, path, problems);
    case 'formula':
      return readFormula(raw, solute, c, path, problems);
  }
}

function readExchange(
  raw: RawLaw & { law: 'exchange' },
  { species }: LawContext,
  path: Path,
  problems: Problem[],
): Law | null {
  const usual = species.includes('acid') || species.length !== 1 ? 'acid' : species[0];
  const acid = species.indexOf(raw.acid ?? usual);
  if (acid < 0) {
    if (raw.acid !== undefined)
      problems.push({
        path: [...path, 'acid'],
        message: `unknown species ${show(raw.acid)}${hint(raw.acid, species)}`,
      });
    else {
      const message =
        species.length === 0 ? NO_SPECIES : `name the species that competes, such as acid: ${species[0]}`;
      problems.push({ path, message });
    }
    return null;
  }
  return {
    law: 'exchange',
    constant: raw.constant.value,
    extractant: raw.extractant.value,
    perSolute: raw.per_solute?.value ?? 1,
    p: raw.p?.value ?? 2,
    q: raw.q?.value ?? 2,
    acid,
  };
}

const NO_SPECIES =
  "the law 'exchange' needs a species that competes: declare species: [acid] and give the feeds their acid";

function readFormula(
  raw: RawLaw & { law: 'formula' },
  solute: string,
  { solutes, species }: LawContext,
  path: Path,
  problems: Problem[],
): Law | null {
  const before = problems.length;
  const others = [...solutes.filter((s) => s !== solute), ...species].map(formulaName);
  // Without a prototype: a name that every object answers to must not pass for a constant.
  const constants: Record<string, number> = Object.assign(Object.create(null), raw.constants);
  for (const name of Object.keys(constants)) {
    const message = wrongConstant(name, others);
    if (message !== null) problems.push({ path: [...path, 'constants', name], message, atKey: true });
  }
  const parsed = parseFormula(raw.organic, ['c_a', ...others, ...Object.keys(constants)]);
  if ('wrong' in parsed) {
    const own = formulaName(solute);
    const self = parsed.unknown === own ? `; ${own} itself is called c_a` : '';
    problems.push({ path: [...path, 'organic'], message: parsed.wrong + self });
  } else {
    const twice = parsed.names.find((n) => others.filter((o) => o === n).length > 1);
    if (twice !== undefined)
      problems.push({
        path: [...path, 'organic'],
        message: `'${twice}' can mean two of the dissolved components; rename one`,
      });
    if (problems.length === before) return { law: 'formula', organic: parsed.formula, constants };
  }
  return null;
}

function wrongConstant(name: string, others: readonly string[]): string | null {
  if (!/^[\p{L}_][\p{L}\p{N}_]*$/u.test(name))
    return `a constant is called by letters, digits and _, got ${show(name)}`;
  if (name === 'c_a' || name === 'pi' || name === 'e' || others.includes(name) || isBuiltIn(name))
    return `${show(name)} has another meaning in a formula; rename the constant`;
  return null;
}
