import type { Phase } from './scenario.ts';

/*
 * What joins streams, taken from a file as far as it makes sense; null where it is too broken to be taken.
 */

export type Loose = Record<string, unknown>;

export const isObject = (v: unknown): v is Loose => typeof v === 'object' && v !== null && !Array.isArray(v);

/** The setting of a single stage. */
export const STAGE = /^stage (\d+)$/;

const stages = (train: Loose): [number, Loose][] =>
  Object.entries(train).flatMap(([key, value]): [number, Loose][] => {
    const digits = STAGE.exec(key)?.[1];
    return digits !== undefined && isObject(value) ? [[Number(digits) - 1, value]] : [];
  });

const texts = (v: unknown): string[] | null =>
  Array.isArray(v) && v.every((n) => typeof n === 'string') ? v : typeof v === 'string' ? [v] : null;

/** How a branch or draw is stated: by a share of the stream, by a flow, or as what is left. */
const statedBy = (take: unknown): 'share' | 'flow' | 'rest' =>
  take === 'rest' ? 'rest' : typeof take === 'string' && take.trim().endsWith('%') ? 'share' : 'flow';

/** Side feeds of a train. */
export function looseSides(train: Loose): { stage: number; stream: string }[] | null {
  const found = stages(train).map(([stage, { takes }]) =>
    takes === undefined ? [] : (texts(takes)?.map((stream) => ({ stage, stream })) ?? null),
  );
  return found.some((q) => q === null) ? null : found.flatMap((q) => q ?? []);
}

/** Streams drawn off a train. */
export function looseDraws(
  train: Loose,
): { stage: number; name: string; phase: Phase; by: 'share' | 'flow' }[] | null {
  const found = stages(train).flatMap(([stage, { draws }]) => {
    if (draws === undefined) return [];
    if (!isObject(draws)) return [null];
    return Object.entries(draws).map(([name, q]) => {
      if (!isObject(q) || (q.phase !== 'aqueous' && q.phase !== 'organic')) return null;
      const phase: Phase = q.phase;
      const by = statedBy(q.take);
      return { stage, name, phase, by: by === 'rest' ? ('flow' as const) : by };
    });
  });
  return found.some((q) => q === null) ? null : found.flatMap((q) => q ?? []);
}

export function looseSplits(
  stream: string,
  branches: Loose,
): { stream: string; branches: string[]; by: ('share' | 'flow' | 'rest')[] } | null {
  const names = Object.keys(branches);
  return { stream, branches: names, by: names.map((n) => statedBy(branches[n])) };
}

export function looseBlends(name: string, of: unknown): { name: string; of: string[] } | null {
  const list = Array.isArray(of) ? texts(of) : null;
  return list === null ? null : { name, of: list };
}
