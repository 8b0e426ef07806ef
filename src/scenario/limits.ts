import { type Basis, concentration, contentKinds } from './content.ts';
import type { Figure } from './fields.ts';
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
  horizon: Figure,
  problems: Problem[],
): Limit | null {
  const complain = (message: string, ...at: string[]): null => {
    problems.push({ path: [...path, ...at], message });
    return null;
  };
  const [one, other] = quantitiesOf(raw.keep, outline);
  const target = outline.limitable.get(one);
  const under = other === null ? null : outline.limitable.get(other);
  // An unknown quantity is complained about with the paths.
  if (!target || under === undefined) return null;
  const sides = (['below', 'above'] as const).filter((s) => raw[s] !== undefined);
  if (sides.length !== 1)
    return complain(`expected one of below and above, got ${sides.length === 0 ? 'neither' : 'both'}`);
  const [side] = sides;
  if (under !== null && target.what !== under.what)
    return complain(
      `a ratio is of two like quantities; ${show(one)} and ${show(other)} are not; divide a concentration by one, or a flow by one`,
      'keep',
    );
  const q = quantity(raw[side], ...(under === null ? kindsOf(target) : RATIO));
  if ('wrong' in q) return complain(q.wrong, side);
  if (!(q.value > 0)) return complain(`must be greater than 0, got ${show(raw[side])}`, side);
  // What else is dissolved in an outlet is not known beforehand.
  if (q.kind === 'a mass fraction' && basis.components.length > 1)
    return complain('with several dissolved components state a limit in g/L or kg/kg', side);
  const from = raw.from?.value ?? 0;
  if (raw.from && from >= horizon.value)
    return complain(
      `counts from ${raw.from.text}, but the run ends at ${horizon.text}; let it count earlier or lengthen the horizon`,
      'from',
    );
  const dot = raw.keep.indexOf('.');
  return {
    stream: raw.keep.slice(0, dot),
    quantity: raw.keep.slice(dot + 1),
    side,
    value: under === null ? inside(q, target, basis, [...path, side], problems) : q.value,
    from,
  };
}

const RATIO: Kind[] = ['a plain number', 'a percentage'];
const OVER = ' / ';

/** The quantity that a limit is put on, and the one that it is divided by. */
export function quantitiesOf(keep: string, outline: Outline): [one: string, other: string | null] {
  const at = outline.limitable.has(keep) ? -1 : keep.indexOf(OVER);
  return at < 0 ? [keep, null] : [keep.slice(0, at).trim(), keep.slice(at + OVER.length).trim()];
}

function kindsOf(t: Target): Kind[] {
  if (t.what === 'volume') return ['a volume'];
  if (t.what === 'purity') return ['a percentage'];
  return t.what === 'flow' ? ['a flow by volume'] : contentKinds;
}

const inside = (q: Quantity, t: Target, basis: Basis, path: Path, problems: Problem[]): number =>
  t.what === 'purity'
    ? 100 * q.value
    : t.component === undefined
      ? q.value
      : concentration(q, t.component, t.phase, basis, path, problems);
