import type { Outline } from './outline.ts';
import type { Problem } from './refusal.ts';
import type { Path } from './scenario.ts';
import { hidden, printable } from './show.ts';

/** A name as a formula calls it: what cannot stand in a formula becomes an underscore. */
export function formulaName(name: string): string {
  const plain = name.replace(/[^\p{L}\p{N}_]/gu, '_');
  return /^\p{N}/u.test(plain) ? `_${plain}` : plain;
}

/** Settings of feeds and tanks, and what paths say of a vessel: no solute or species is called like that. */
const TAKEN = [
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
/** Characters of a name; it stands in the header of every column. */
const LONGEST = 80;

/** Words that every object of the language answers to, so that they cannot tell one thing from another. */
export const isBuiltIn = (name: string): boolean => Object.hasOwn(Object.prototype, name);

/** What is wrong with a name, or null. They are the user's own, but paths, arrows and columns must stay readable. */
function wrongName(name: string): string | null {
  const mark = /[.,:#"]|->/.exec(name)?.[0] ?? hidden(name);
  if (mark !== null) return `a name must not hold '${printable(mark)}'`;
  if (name.trim() === '') return 'a name must not be empty';
  if (name.trim() !== name) return 'a name must not begin or end with a space';
  if (!/^[\p{L}\p{N}]/u.test(name)) return `a name must begin with a letter or a digit, got '${name}'`;
  if (name.length > LONGEST)
    return `a name may have ${LONGEST} characters, this has ${name.length}; shorten it`;
  return isBuiltIn(name) ? `'${name}' cannot be a name here; choose another one` : null;
}

/** Complains about names that cannot be used, stand for two things, or would make paths ambiguous. */
export function checkNames(plan: Outline, problems: Problem[]): void {
  const check = (name: string, path: Path, also: string | null = null): void => {
    const message = wrongName(name) ?? also;
    if (message !== null) problems.push({ path, message, atKey: path.at(-1) === name });
  };
  const components = [
    ...plan.solutes.map((name, i) => ({ name, path: ['solutes', i] })),
    ...plan.species.map((name, i) => ({ name, path: ['species', i] })),
  ];
  components.forEach(({ name, path }, i) => {
    const twice = components.findIndex((c) => c.name === name) !== i;
    const taken = TAKEN.includes(name) || /^stage \d+$/.test(name);
    const also = taken ? `'${name}' has another meaning in a scenario; choose another name` : null;
    check(name, path, twice ? `'${name}' is named twice; take one out` : also);
  });

  // A path begins with a name, so a tank or a train must not share one with a stream.
  const streams = new Set([
    ...plan.feeds.map((f) => f.name),
    ...plan.trains.flatMap((t) => [t.aqueous.to, t.organic.to]),
    ...plan.tanks.map((t) => t.to),
    ...plan.trains.flatMap((t) => t.draws.map((d) => d.name)),
    ...plan.splits.flatMap((q) => q.branches),
    ...plan.blends.map((b) => b.name),
  ]);
  const tanks = new Set(plan.tanks.map((t) => t.name));
  const spills = new Set(plan.tanks.map((t) => `${t.name} overflow`));
  const spill = (name: string): string | null =>
    spills.has(name) ? `'${name}' is what its tank spills; choose another name` : null;
  for (const { name } of plan.feeds) check(name, ['feeds', name], spill(name));
  for (const { name, to } of plan.tanks) {
    const shared = streams.has(name) ? `'${name}' is also a stream; give the tank another name` : null;
    check(name, ['tanks', name], shared ?? spill(name));
    check(to, ['tanks', name, 'to'], spill(to));
  }
  for (const { stream, branches } of plan.splits)
    for (const name of branches) check(name, ['splits', stream, name], spill(name));
  for (const { name } of plan.blends) check(name, ['blends', name], spill(name));
  const trains = new Set(plan.trains.map((t) => t.name));
  for (const name of plan.batches) {
    const shared = [name, `${name} aqueous`, `${name} organic`].some(
      (n) => streams.has(n) || tanks.has(n) || trains.has(n),
    );
    check(
      name,
      ['batches', name],
      shared ? `'${name}' or one of its phases is also something else; rename it` : null,
    );
  }
  for (const { name, draws } of plan.trains)
    for (const d of draws)
      check(d.name, ['trains', name, `stage ${d.stage + 1}`, 'draws', d.name], spill(d.name));
  for (const { name, aqueous, organic } of plan.trains) {
    const shared = streams.has(name) || tanks.has(name);
    const also = shared ? `'${name}' is also a stream or a tank; give the train another name` : null;
    check(name, ['trains', name], also ?? spill(name));
    check(aqueous.to, ['trains', name, 'aqueous'], spill(aqueous.to));
    check(organic.to, ['trains', name, 'organic'], spill(organic.to));
  }
}
