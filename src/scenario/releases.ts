import { hint } from './nearest.ts';
import type { Problem } from './refusal.ts';
import type { Path } from './scenario.ts';
import { show } from './show.ts';

/** kg of each species set free per kg of each solute extracted, gathered from the laws of all trains. */
export class Releases {
  readonly #species: readonly string[];
  readonly #stated: (number | null)[][];

  constructor(solutes: number, species: readonly string[]) {
    this.#species = species;
    this.#stated = Array.from({ length: solutes }, () => species.map(() => null));
  }

  /** What one law states for its solute. Stripping undoes extraction, so all trains must agree. */
  add(
    solute: number,
    given: Readonly<Record<string, { readonly value: number }>> | undefined,
    path: Path,
    problems: Problem[],
  ): void {
    const row = this.#stated[solute];
    for (const [name, { value }] of Object.entries(given ?? {})) {
      const at = [...path, name];
      const k = this.#species.indexOf(name);
      if (k < 0) {
        const message = `unknown species ${show(name)}${hint(name, this.#species)}`;
        problems.push({ path: at, message, atKey: true });
      } else if (row[k] !== null && row[k] !== value) {
        const message = `another train states ${row[k]}, this one ${value}; what a solute releases is the same everywhere; state one value`;
        problems.push({ path: at, message });
      } else row[k] = value;
    }
  }

  /** [solute][species] */
  table(): number[][] {
    return this.#stated.map((row) => row.map((r) => r ?? 0));
  }
}
