import { concentration, contentKinds } from './content.ts';
import type { Surroundings } from './read-commissioning.ts';
import type { Problem } from './refusal.ts';
import type { Variation } from './rehearsing.ts';
import type { Scenario } from './scenario.ts';
import type { RawScenario } from './schema.ts';
import { show } from './show.ts';
import { quantity } from './units.ts';

type RawVariation = NonNullable<RawScenario['variation']>[number];

/** Corners in one correlation time, unless stated. */
const PER_CORRELATION = 10;
/** Corners of one variation over the run. */
const MOST_CORNERS = 20_000;

/** Random variations of feeds as a scenario states them → SI. Complains in place. */
export function readVariations(
  raw: RawScenario,
  s: Scenario,
  around: Surroundings,
  problems: Problem[],
): Variation[] {
  return (raw.variation ?? []).flatMap((v, i) => new VariationReader(v, i, s, around, problems).read() ?? []);
}

class VariationReader {
  readonly #raw: RawVariation;
  readonly #index: number;
  readonly #s: Scenario;
  readonly #around: Surroundings;
  readonly #problems: Problem[];

  constructor(raw: RawVariation, index: number, s: Scenario, around: Surroundings, problems: Problem[]) {
    this.#raw = raw;
    this.#index = index;
    this.#s = s;
    this.#around = around;
    this.#problems = problems;
  }

  read(): Variation | null {
    const { change, deviation, correlation_time: correlation, seed } = this.#raw;
    const target = this.#around.outline.changeable.get(change);
    // An unknown quantity is complained about with the paths.
    if (!target) return null;
    const feed = this.#s.feeds.find((f) => f.name === change.slice(0, change.lastIndexOf('.')));
    if (!feed || (target.what !== 'flow' && target.what !== 'content'))
      return this.#complain(
        'change',
        `only flows and concentrations of feeds vary; ${show(change)} is none; name a feed's`,
      );
    const k = this.#around.basis.components.indexOf(target.component ?? '');
    const base = k < 0 ? feed.flow : feed.content[k];
    const spread = this.#spread(deviation, base);
    if (spread === null) return null;
    const every = this.#raw.every?.value ?? correlation.value / PER_CORRELATION;
    const corners = Math.ceil(this.#s.horizon / every) + 1;
    if (corners > MOST_CORNERS)
      return this.#complain(
        'every',
        `makes ${corners} corners over the run, more than ${MOST_CORNERS}; lengthen it or shorten the horizon`,
      );
    return {
      quantity: change,
      base,
      deviation: spread,
      correlation: correlation.value,
      every,
      seed: seed ?? this.#index + 1,
      words: `${change} varies by ${deviation} over ${correlation.text}`,
    };
  }

  /** Standard deviation in SI. */
  #spread(text: string | number, base: number): number | null {
    const target = this.#around.outline.changeable.get(this.#raw.change);
    const kinds =
      target?.what === 'flow'
        ? (['a flow by volume'] as const)
        : contentKinds.filter((q) => q !== 'a mass fraction');
    const q = quantity(text, 'a percentage', ...kinds);
    if ('wrong' in q) return this.#complain('deviation', q.wrong);
    if (!(q.value > 0)) return this.#complain('deviation', `must be greater than 0, got ${show(text)}`);
    if (q.kind === 'a percentage') return q.value * base;
    if (target?.component === undefined) return q.value;
    const path = ['variation', this.#index, 'deviation'];
    return concentration(q, target.component, target.phase, this.#around.basis, path, this.#problems);
  }

  #complain(key: string, message: string): null {
    this.#problems.push({ path: ['variation', this.#index, key], message });
    return null;
  }
}
