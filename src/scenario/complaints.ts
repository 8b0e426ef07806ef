import type { z } from 'zod';
import { guess, hint } from './nearest.ts';
import type { Outline } from './outline.ts';
import type { Problem } from './refusal.ts';
import type { Path } from './scenario.ts';
import { show } from './show.ts';

export type Issue = z.core.$ZodIssue;

/** What a value should have been, where a schema has no words of its own for it. */
export function fallback(issue: { readonly expected?: unknown; readonly input?: unknown }): string {
  const wanted: Record<string, string> = {
    boolean: 'true or false',
    number: 'a number',
    record: 'settings by name',
    string: 'a text',
    array: 'a list',
  };
  const what = wanted[String(issue.expected)] ?? 'something else';
  return issue.input === undefined
    ? `is missing; expected ${what}`
    : `expected ${what}, got ${show(issue.input)}`;
}

/** A schema's complaint in our words; unknown keys one by one with the nearest known one. */
export function complaints(issue: Issue, schema: z.ZodType, plan: Outline): Problem[] {
  const path = issue.path as Path;
  if (issue.code === 'unrecognized_keys') {
    const known = keysAt(schema, path);
    const dissolved = [...plan.solutes, ...plan.species];
    // While it is not known what is dissolved, any key may be a solute; and a wrong name is complained about as such.
    const holdsContent = known.includes('phase') || path.at(-2) === 'initial';
    return issue.keys
      .filter((k) => !(holdsContent && !plan.named) && !dissolved.includes(k))
      .map((k) => ({ path: [...path, k], message: unknownKey(k, known, holdsContent), atKey: true }));
  }
  if (issue.code === 'invalid_union') {
    // The branch that got furthest knows best what is wrong.
    const branch = issue.errors.find((b) =>
      b.some((i) => i.code === 'custom' || i.code === 'unrecognized_keys' || i.path.length > 0),
    );
    if (branch)
      return branch.flatMap((i) => complaints({ ...i, path: [...path, ...i.path] } as Issue, schema, plan));
  }
  return [{ path, message: issue.message }];
}

function unknownKey(key: string, known: readonly string[], holdsContent: boolean): string {
  const wrong = `unknown key ${show(key)}`;
  // In braces a comma ends a setting: 5,2 g/L is read as the number 5 and a key '2 g/L'.
  if (/^\d/.test(key)) return `${wrong}; if it is the rest of a figure, write a decimal point, not a comma`;
  if (!holdsContent || guess(key, known) !== '') return wrong + hint(key, known);
  return `${wrong}${hint(key, known)} (what is dissolved is declared under solutes or species)`;
}

/** The keys that a schema knows at a path. */
function keysAt(schema: z.ZodType, path: Path): string[] {
  let options: unknown[] = [schema];
  const open = (s: unknown): unknown[] => {
    const def = (s as { def?: Record<string, unknown> }).def;
    if (!def) return [];
    if (def.type === 'optional' || def.type === 'default' || def.type === 'nullable')
      return open(def.innerType);
    if (def.type === 'union') return (def.options as unknown[]).flatMap(open);
    if (def.type === 'pipe') return open(def.in);
    return [s];
  };
  for (const step of path) {
    options = options.flatMap(open).flatMap((s) => {
      const def = (s as { def: Record<string, unknown> }).def;
      if (def.type === 'object') return (def.shape as Record<string, unknown>)[step] ?? [];
      if (def.type === 'record') return def.valueType ?? [];
      if (def.type === 'array') return def.element ?? [];
      return [];
    });
  }
  return options.flatMap(open).flatMap((s) => {
    const def = (s as { def: Record<string, unknown> }).def;
    return def.type === 'object' ? Object.keys(def.shape as object) : [];
  });
}
