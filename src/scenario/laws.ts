import { type Basis, concentration } from './content.ts';
import { BadData, columnIndex, headerUnit, numbers, readTable } from './csv.ts';
import { parseFormula } from './formula.ts';
import { formulaName } from './names.ts';
import { hint } from './nearest.ts';
import type { Problem } from './refusal.ts';
import type { Law, Path, Phase } from './scenario.ts';
import type { RawScenario } from './schema.ts';
import { quantity } from './units.ts';

type RawTrain = RawScenario['trains'][string];
type RawLaw = NonNullable<RawTrain['equilibrium']>[string];

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
  const complain = (message: string, ...at: string[]): null => {
    problems.push({ path: [...path, ...at], message });
    return null;
  };
  switch (raw.law) {
    case 'ratio':
      return { law: 'ratio', ratio: raw.ratio.value };
    case 'langmuir': {
      const capacity = concentration(
        raw.capacity,
        solute,
        'organic',
        c.basis,
        [...path, 'capacity'],
        problems,
      );
      return { law: 'langmuir', capacity, affinity: raw.affinity.value };
    }
    case 'freundlich':
      return { law: 'freundlich', coefficient: raw.coefficient.value, exponent: raw.exponent.value };
    case 'table':
      return readTableLaw(raw, solute, c, path, problems);
    case 'exchange': {
      const acid =
        raw.acid ?? (c.species.includes('acid') ? 'acid' : c.species.length === 1 ? c.species[0] : undefined);
      if (acid === undefined)
        return complain(
          "the law 'exchange' needs a species that competes: declare species: [acid] and give the feeds their acid",
        );
      if (!c.species.includes(acid))
        return complain(`unknown species '${acid}'${hint(acid, c.species)}`, 'acid');
      return {
        law: 'exchange',
        constant: raw.constant.value,
        extractant: raw.extractant.value,
        perSolute: raw.per_solute?.value ?? 1,
        p: raw.p?.value ?? 2,
        q: raw.q?.value ?? 2,
        acid: c.species.indexOf(acid),
      };
    }
    case 'formula': {
      const constants = raw.constants ?? {};
      const names = [
        'c_a',
        ...[...c.solutes.filter((s) => s !== solute), ...c.species].map(formulaName),
        ...Object.keys(constants),
      ];
      const parsed = parseFormula(raw.organic, names);
      if ('wrong' in parsed) return complain(parsed.wrong, 'organic');
      for (const [name, value] of Object.entries(constants))
        if (!Number.isFinite(value)) return complain('must be a finite number', 'constants', name);
      return { law: 'formula', organic: parsed.formula, constants };
    }
  }
}

function readTableLaw(
  raw: RawLaw & { law: 'table' },
  solute: string,
  c: LawContext,
  path: Path,
  problems: Problem[],
): Law | null {
  const column = (phase: Phase): number[] => {
    const given = raw[phase];
    const at = [...path, phase];
    const convert = (factor: number, unit: string, v: number): number => {
      const q = quantity(
        `1 ${unit}`,
        'a concentration',
        'a molar concentration',
        'a mass ratio',
        'a mass fraction',
      );
      if ('wrong' in q) throw new BadData(q.wrong);
      return concentration(
        { kind: q.kind, value: v * factor * q.value },
        solute,
        phase,
        c.basis,
        at,
        problems,
      );
    };
    if (typeof given === 'string') {
      if (raw.file === undefined)
        throw new BadData(`expected a list of numbers, got '${given}'; name a CSV file with file:`);
      const t = readTable(c.folder, raw.file);
      const index = columnIndex(t, given);
      const { kind, factor } = headerUnit(
        t,
        index,
        'a concentration',
        'a molar concentration',
        'a mass ratio',
        'a mass fraction',
      );
      return numbers(t, index).map((v) =>
        concentration({ kind, value: v * factor }, solute, phase, c.basis, at, problems),
      );
    }
    if (raw.unit === undefined) throw new BadData('the two columns need a unit: unit: g/L');
    const unit = raw.unit;
    return given.map((v) => convert(1, unit, v));
  };
  const columns: Partial<Record<Phase, number[]>> = {};
  for (const phase of ['aqueous', 'organic'] as const) {
    try {
      columns[phase] = column(phase);
    } catch (e) {
      if (!(e instanceof BadData)) throw e;
      problems.push({ path: [...path, phase], message: e.message });
    }
  }
  const { aqueous, organic } = columns;
  if (!aqueous || !organic || [...aqueous, ...organic].some(Number.isNaN)) return null;
  if (aqueous.length !== organic.length) {
    problems.push({
      path: [...path, 'organic'],
      message: `the columns differ in length: ${aqueous.length} aqueous, ${organic.length} organic`,
    });
    return null;
  }
  const withZero = aqueous[0] > 0 && organic[0] > 0;
  const a = withZero ? [0, ...aqueous] : aqueous;
  const o = withZero ? [0, ...organic] : organic;
  if (a[0] !== 0 || o[0] !== 0) {
    problems.push({
      path: [...path, 'aqueous'],
      message: 'an isotherm starts at 0, 0 (it is added when left out)',
    });
    return null;
  }
  if (a.length < 2) {
    problems.push({
      path: [...path, 'aqueous'],
      message: 'an isotherm needs at least one point besides 0, 0',
    });
    return null;
  }
  for (let i = 1; i < a.length; i++)
    if (!(a[i] > a[i - 1] && o[i] > o[i - 1])) {
      problems.push({
        path,
        message: `the isotherm must rise from point to point in both columns; point ${i + (withZero ? 0 : 1)} (${a[i]}, ${o[i]} g/L) does not lie above (${a[i - 1]}, ${o[i - 1]} g/L)`,
      });
      return null;
    }
  return { law: 'table', aqueous: a, organic: o };
}
