import type { Basis } from './content.ts';
import { carrierFlow, concentration } from './content.ts';
import { BadData, columnIndex, elapsed, headerUnit, numbers, readTable } from './csv.ts';
import type { Outline, Target } from './outline.ts';
import type { Problem } from './refusal.ts';
import type { Change, Path } from './scenario.ts';
import type { RawScenario } from './schema.ts';
import { type Kind, type Quantity, quantity, show } from './units.ts';

type RawChange = NonNullable<RawScenario['upsets']>[number];

const flowKinds: Kind[] = ['a flow by volume', 'a flow by mass'];
const contentKinds: Kind[] = ['a concentration', 'a molar concentration', 'a mass ratio', 'a mass fraction'];

/** What a target is measured in. */
export const kindsOf = (t: Target): Kind[] => (t.what === 'flow' ? flowKinds : contentKinds);

/** A figure for a target, in SI. */
export function inTarget(q: Quantity, t: Target, basis: Basis, path: Path, problems: Problem[]): number {
  if (t.what === 'flow') return carrierFlow(q, t.phase, [], basis, path, problems);
  return concentration(q, t.component as string, t.phase, basis, path, problems);
}

/** One change of an input: exactly one of to, by, follow. Complains in place; null where it cannot be used. */
export function readChange(
  raw: RawChange,
  path: Path,
  outline: Outline,
  basis: Basis,
  folder: string,
  problems: Problem[],
): Change | null {
  const complain = (message: string, ...at: string[]): null => {
    problems.push({ path: [...path, ...at], message });
    return null;
  };
  const target = outline.changeable.get(raw.change);
  // An unknown quantity is the outline's complaint.
  if (!target) return null;
  const given = (['to', 'by', 'follow'] as const).filter((k) => raw[k] !== undefined);
  if (given.length !== 1)
    return complain(`expected exactly one of to, by, follow; got ${given.join(' and ') || 'none'}`);
  if (raw.at.value < 0) return complain('must not be negative', 'at');
  const base = {
    at: raw.at.value,
    quantity: raw.change,
    over: raw.over?.value ?? 0,
    lasts: raw.for?.value ?? null,
  };
  if (target.what === 'mixer') {
    if (raw.to !== 'stopped' && raw.to !== 'running')
      return complain(
        `a mixer is set to 'stopped' or 'running', got ${show(raw.to ?? raw.by ?? raw.follow)}`,
        given[0],
      );
    const words = `${raw.change} ${raw.to}`;
    return { ...base, how: { to: raw.to === 'running' ? 1 : 0 }, words };
  }
  if (raw.to !== undefined) {
    const q = quantity(raw.to, ...kindsOf(target));
    if ('wrong' in q) return complain(q.wrong, 'to');
    if (q.value < 0) return complain('must not be negative', 'to');
    const to = inTarget(q, target, basis, [...path, 'to'], problems);
    return { ...base, how: { to }, words: `${raw.change} to ${raw.to}` };
  }
  if (raw.by !== undefined) {
    if (typeof raw.by === 'number')
      return complain(
        `a change by ${raw.by} can be read in two ways: write '${raw.by} %' or give a unit, such as '${raw.by} ${target.what === 'flow' ? 'm^3/h' : 'g/L'}'`,
        'by',
      );
    const q = quantity(raw.by, 'a percentage', ...kindsOf(target));
    if ('wrong' in q) return complain(q.wrong, 'by');
    const words = `${raw.change} ${raw.by}`;
    if (q.kind === 'a percentage') return { ...base, how: { by: q.value, relative: true }, words };
    return {
      ...base,
      how: { by: inTarget(q, target, basis, [...path, 'by'], problems), relative: false },
      words,
    };
  }
  const { file, column, time } = raw.follow as NonNullable<RawChange['follow']>;
  try {
    const t = readTable(folder, file);
    const values = columnIndex(t, column);
    const { kind, factor } = headerUnit(t, values, ...kindsOf(target));
    const times = elapsed(t, time === undefined ? 0 : columnIndex(t, time));
    const list = numbers(t, values);
    const low = list.findIndex((v) => v < 0);
    if (low >= 0) return complain(`${file}:${t.rows[low].line}: ${show(list[low])} is negative`, 'follow');
    const at = [...path, 'follow', 'column'];
    return {
      ...base,
      how: {
        follow: {
          times: times.map((v) => v + base.at),
          values: list.map((v) => inTarget({ kind, value: v * factor }, target, basis, at, problems)),
        },
      },
      words: `${raw.change} follows ${file}`,
    };
  } catch (e) {
    if (e instanceof BadData) return complain(e.message, 'follow');
    throw e;
  }
}
