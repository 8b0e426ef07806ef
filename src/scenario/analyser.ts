import type { z } from 'zod';
import { type Basis, concentration, contentKinds } from './content.ts';
import { figure, later, notNegative, object, positive, word } from './fields.ts';
import type { Problem } from './refusal.ts';
import type { Path, Phase } from './scenario.ts';
import { show } from './show.ts';
import { quantity } from './units.ts';

/** An instrument or a laboratory that measures one concentration now and then. */
export interface Analyser {
  /** s between samples; the first is taken at `first`. */
  readonly every: number;
  readonly first: number;
  /** s from a sample to its result, which then holds until the next one. */
  readonly delay: number;
  /** A grab is the outlet as it is; a composite is its mean since the sample before. */
  readonly takes: 'grab' | 'composite';
  /** Standard deviation: a share of the reading, or kg/m³. */
  readonly noise: { readonly share: number } | { readonly absolute: number };
  /** kg/m³ that every reading is off. */
  readonly bias: number;
  /** Share of the results that fail. */
  readonly dropout: number;
  /** What a failed result does: the last one holds, or the loop goes to manual. */
  readonly onBad: 'hold' | 'manual';
}

/** `{every: 10 min, delay: 6 min, takes: grab, noise: 2 % of reading, on_bad: hold}` */
export const analyserSchema = object({
  every: figure(['a time'], positive),
  first: figure(['a time'], notNegative).optional().describe('time of the first sample'),
  delay: figure(['a time'], notNegative).optional(),
  takes: word(['grab', 'composite']).optional(),
  noise: later("a noise such as '2 % of reading' or '0.01 g/L'").optional(),
  bias: later("a bias such as '0.01 g/L'").optional(),
  dropout: figure(['a percentage'], notNegative).optional(),
  on_bad: word(['hold', 'manual']).optional(),
});
export type RawAnalyser = z.output<typeof analyserSchema>;

/** Raw settings → SI. `component` is what it measures, in a stream of `phase`. Complains in place. */
export function readAnalyser(
  raw: RawAnalyser,
  component: string,
  phase: Phase,
  basis: Basis,
  path: Path,
  problems: Problem[],
): Analyser {
  const inside = (text: string | number, key: string): number => {
    const q = quantity(text, ...contentKinds.filter((k) => k !== 'a mass fraction'));
    if (!('wrong' in q)) return concentration(q, component, phase, basis, [...path, key], problems);
    problems.push({ path: [...path, key], message: q.wrong });
    return Number.NaN;
  };
  const dropout = raw.dropout?.value ?? 0;
  if (dropout >= 1)
    problems.push({
      path: [...path, 'dropout'],
      message: `must be less than 100 %, got ${raw.dropout?.text}`,
    });
  return {
    every: raw.every.value,
    first: raw.first?.value ?? raw.every.value,
    delay: raw.delay?.value ?? 0,
    takes: raw.takes ?? 'grab',
    noise: noiseOf(raw.noise, inside, path, problems),
    bias: raw.bias === undefined ? 0 : inside(raw.bias, 'bias'),
    dropout,
    onBad: raw.on_bad ?? 'hold',
  };
}

function noiseOf(
  raw: string | number | undefined,
  inside: (text: string | number, key: string) => number,
  path: Path,
  problems: Problem[],
): Analyser['noise'] {
  if (raw === undefined) return { absolute: 0 };
  const share = /^(.*%)\s+of\s+reading$/.exec(String(raw).trim())?.[1];
  if (share !== undefined) {
    const q = quantity(share, 'a percentage');
    if (!('wrong' in q) && q.value >= 0) return { share: q.value };
    problems.push({
      path: [...path, 'noise'],
      message: `expected a noise such as '2 % of reading', got ${show(raw)}`,
    });
    return { absolute: 0 };
  }
  if (String(raw).trim().endsWith('%')) {
    const message = `a noise of ${raw} is of what? write '${raw} of reading', or the figure with its unit`;
    problems.push({ path: [...path, 'noise'], message });
    return { absolute: 0 };
  }
  const absolute = inside(raw, 'noise');
  if (absolute < 0)
    problems.push({ path: [...path, 'noise'], message: `must not be negative, got ${show(raw)}` });
  return { absolute };
}
