import { usualBandHoldUp, usualCarryExponent, usualLoss, usualPort } from './plain.ts';
import type { Problem } from './refusal.ts';
import type { Band, Carry, Path, Settler, Weirs } from './scenario.ts';
import type { RawScenario } from './schema.ts';

type RawSettler = Exclude<NonNullable<RawScenario['trains'][string]['settler']>, 'none'>;
type Figures = Pick<Settler, 'shortCircuit' | 'band' | 'carry' | 'weirs'>;

/** Band, entrainment, weirs and short circuit of a settler. */
export function settlerFigures(q: RawSettler, path: Path, problems: Problem[]): Figures {
  const needsArea = (what: string, given: unknown): void => {
    if (given !== undefined && q.area === undefined)
      problems.push({
        path: [...path, what],
        message: `a settler with ${what} needs its area, such as 'area: 180 m^2'`,
      });
  };
  needsArea('band', q.band);
  needsArea('weirs', q.weirs);
  return {
    shortCircuit: q.short_circuit?.value ?? 0,
    band: bandOf(q, [...path, 'band'], problems),
    carry: carryOf(q),
    weirs: weirsOf(q),
  };
}

function bandOf({ band: b }: RawSettler, path: Path, problems: Problem[]): Band | null {
  if (b === undefined) return null;
  if ((b.exponent === undefined) === (b.floods_at === undefined))
    problems.push({
      path,
      message: `the band needs one of exponent (power law) and floods_at (hyperbolic law), got ${b.exponent ? 'both' : 'neither'}`,
    });
  if (b.floods_at !== undefined && b.floods_at.value <= b.at.value)
    problems.push({
      path: [...path, 'floods_at'],
      message: `must be more than at: ${b.at.text}, got ${b.floods_at.text}`,
    });
  const other = b.other_continuity;
  if (b.floods_at !== undefined && other !== undefined && b.floods_at.value <= other.at.value)
    problems.push({
      path: [...path, 'other_continuity', 'at'],
      message: `must be less than floods_at: ${b.floods_at.text}, got ${other.at.text}`,
    });
  const law =
    b.floods_at !== undefined
      ? { floodsAt: b.floods_at.value }
      : { exponent: b.exponent?.value ?? Number.NaN };
  return {
    thickness: b.thickness.value,
    at: b.at.value,
    law,
    holdUp: b.hold_up?.value ?? usualBandHoldUp,
    coalescer: b.coalescer?.value ?? 1,
    other: other === undefined ? null : { thickness: other.thickness.value, at: other.at.value, law },
  };
}

function carryOf({ entrainment: e }: RawSettler): Carry | null {
  if (e === undefined) return null;
  const point = (q: { organic_in_aqueous?: { value: number }; aqueous_in_organic?: { value: number } }) => ({
    organicInAqueous: q.organic_in_aqueous?.value ?? 0,
    aqueousInOrganic: q.aqueous_in_organic?.value ?? 0,
  });
  return {
    ...point(e),
    exponent: e.exponent?.value ?? usualCarryExponent,
    other: e.other_continuity === undefined ? null : point(e.other_continuity),
  };
}

function weirsOf({ weirs: w }: RawSettler): Weirs | null {
  if (w === undefined) return null;
  return {
    organicLength: w.organic_length.value,
    aqueousLength: w.aqueous_length.value,
    port: w.port?.value ?? usualPort,
    loss: w.loss?.value ?? usualLoss,
  };
}
