import { readFileSync } from 'node:fs';
import { isAbsolute, join } from 'node:path';
import type { Problem } from './refusal.ts';
import type { Scenario } from './scenario.ts';
import type { RawScenario } from './schema.ts';

/** The start that a scenario asks for; a kept state is read from its file, relative to the scenario. */
export function startOf(raw: RawScenario['start'], folder: string, problems: Problem[]): Scenario['start'] {
  if (raw === undefined) return 'barren';
  if (typeof raw === 'string') return raw;
  const file = raw.saved;
  const complain = (message: string): Scenario['start'] => {
    problems.push({ path: ['start', 'saved'], message });
    return 'barren';
  };
  let data: unknown;
  try {
    data = JSON.parse(readFileSync(isAbsolute(file) ? file : join(folder, file), 'utf8'));
  } catch (e) {
    const read = (e as NodeJS.ErrnoException).code === undefined;
    return complain(
      read
        ? `${file} is not a kept state (not JSON); name a file that run --save-state wrote`
        : `cannot read ${file} (looked for it beside the scenario); look at its name and place`,
    );
  }
  const {
    upsettle_state: format,
    topology,
    places,
    values,
    modes = {},
    volumes_m3: volumes,
  } = (data ?? {}) as Record<string, unknown>;
  const whole =
    format === 1 &&
    typeof topology === 'string' &&
    Array.isArray(places) &&
    Array.isArray(values) &&
    places.length === values.length &&
    places.every((p) => typeof p === 'string') &&
    values.every((v) => typeof v === 'number' && Number.isFinite(v)) &&
    typeof modes === 'object' &&
    modes !== null &&
    Object.values(modes).every((v) => v === 0 || v === 1) &&
    isVolumes(volumes, places.length);
  if (!whole)
    return complain(`${file} is not a kept state of this program; name a file that run --save-state wrote`);
  return {
    file,
    topology,
    places: places as string[],
    values: values as number[],
    modes: modes as Record<string, number>,
    ...(volumes === undefined ? {} : { volumes: volumes as (number | null)[] }),
  };
}

/** States kept by earlier versions say nothing of volumes. */
const isVolumes = (v: unknown, places: number): boolean =>
  v === undefined ||
  (Array.isArray(v) && v.length === places && v.every((q) => q === null || typeof q === 'number'));
