import { type Basis, concentration, contentKinds } from './content.ts';
import type { Outline, Target } from './outline.ts';
import type { Problem } from './refusal.ts';
import type { Limit, Path } from './scenario.ts';
import type { RawScenario } from './schema.ts';
import { show } from './show.ts';
import { type Kind, type Quantity, quantity } from './units.ts';

type RawLimit = NonNullable<RawScenario['limits']>[number];

/** A limit: exactly one of below and above. Complains in place; null where it cannot be used. */
export function readLimit(
  raw: RawLimit,
  path: Path,
  outline: Outline,
  basis: Basis,
  problems: Problem[],
): Limit | null {
  const complain = (message: string, ...at: string[]): null => {
    problems.push({ path: [...path, ...at], message });
    return null;
  };
  const target = outline.limitable.get(raw.keep);
  // An unknown quantity is complained about with the paths.
  if (!target) return null;
  const sides = (['below', 'above'] as const).filter((s) => raw[s] !== undefined);
  if (sides.length !== 1)
    return complain(`expected one of below and above, got ${sides.length === 0 ? 'neither' : 'both'}`);
  const [side] = sides;
  const q = quantity(raw[side], ...kindsOf(target));
  if ('wrong' in q) return complain(q.wrong, side);
  if (!(q.value > 0)) return complain(`must be greater than 0, got ${show(raw[side])}`, side);
  // What else is dissolved in an outlet is not known beforehand.
  if (q.kind === 'a mass fraction' && basis.components.length > 1)
    return complain('with several dissolved components state a limit in g/L or kg/kg', side);
  const dot = raw.keep.indexOf('.');
  return {
    stream: raw.keep.slice(0, dot),
    quantity: raw.keep.slice(dot + 1),
    side,
    value: inside(q, target, basis, [...path, side], problems),
  };
}

function kindsOf(t: Target): Kind[] {
  if (t.what === 'volume') return ['a volume'];
  return t.what === 'flow' ? ['a flow by volume'] : contentKinds;
}

const inside = (q: Quantity, t: Target, basis: Basis, path: Path, problems: Problem[]): number =>
  t.component === undefined ? q.value : concentration(q, t.component, t.phase, basis, path, problems);
