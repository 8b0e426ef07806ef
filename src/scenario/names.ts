import type { Problem } from './refusal.ts';
import type { Path } from './scenario.ts';

/** Letters and digits of a name with everything else as underscores: how a formula can call it. */
export const formulaName = (name: string): string => name.replace(/[^A-Za-z0-9_]/g, '_');

const RESERVED = [
  'flow',
  'volume',
  'mixer',
  'settler',
  'pump',
  'phase',
  'from',
  'to',
  'filled',
  'held',
  'overflowing',
];

/** Names are the user's own, but paths, arrows and comments must stay readable in them. */
export function checkName(name: string, path: Path, problems: Problem[], isComponent = false): void {
  const bad = /[.,:#"\n\r]|->/.exec(name)?.[0];
  if (bad !== undefined) problems.push({ path, message: `a name must not hold '${bad}'`, atKey: true });
  else if (name.trim() !== name || name === '')
    problems.push({ path, message: 'a name must not be empty or begin or end with a space', atKey: true });
  else if (name.length > 80) problems.push({ path, message: 'a name may have 80 characters', atKey: true });
  else if (isComponent && (RESERVED.includes(name) || /^stage \d+$/.test(name)))
    problems.push({
      path,
      message: `'${name}' has another meaning in a scenario; choose another name`,
      atKey: true,
    });
}
