/** A checked scenario: plain data, SI inside (m, s, kg, kg/m³, m³/s). Names are the user's own. */

export type Phase = 'aqueous' | 'organic';

/** Keys from the top of the file to a value: errors found later are traced to their line by it. */
export type Path = readonly (string | number)[];

export interface Feed {
  readonly name: string;
  readonly phase: Phase;
  /** m³/s of carrier. */
  readonly flow: number;
  /** kg/m³, solutes first, then species, in the scenario's order. */
  readonly content: readonly number[];
}

export interface Tank {
  readonly name: string;
  readonly phase: Phase;
  readonly from: string;
  readonly to: string;
  /** m³ */
  readonly volume: number;
  /** m³ held at the start. */
  readonly held: number;
  /** m³/s of its pump; null: it overflows at its present level and has no pump. */
  readonly flow: number | null;
  readonly content: readonly number[];
}

export type Transfer =
  | { readonly given: 'ka'; readonly ka: number; readonly fixed: boolean }
  | { readonly given: 'efficiency'; readonly efficiency: number };

export interface Mixer {
  /** m³ */
  readonly volume: number;
  readonly continuity: Phase;
  /** The phase whose overall coefficient and concentration difference drive the transfer. */
  readonly side: Phase;
  readonly transfer: Transfer;
}

export interface Settler {
  /** m³ of each layer at design hold-up. */
  readonly aqueous: number;
  readonly organic: number;
  readonly parts: number;
  /** m², null where only volumes were given. */
  readonly area: number | null;
}

export interface Stage {
  readonly mixer: Mixer;
  readonly settler: Settler;
}

export type Formula =
  | { readonly kind: 'number'; readonly value: number }
  | { readonly kind: 'name'; readonly name: string }
  | { readonly kind: 'apply'; readonly op: string; readonly args: readonly Formula[] };

export type Law =
  | { readonly law: 'ratio'; readonly ratio: number }
  | { readonly law: 'langmuir'; readonly capacity: number; readonly affinity: number }
  | { readonly law: 'freundlich'; readonly coefficient: number; readonly exponent: number }
  | { readonly law: 'table'; readonly aqueous: readonly number[]; readonly organic: readonly number[] }
  | {
      readonly law: 'exchange';
      readonly constant: number;
      readonly extractant: number;
      readonly perSolute: number;
      readonly p: number;
      readonly q: number;
      /** Index of the acid among the species. */
      readonly acid: number;
    }
  | {
      readonly law: 'formula';
      readonly organic: Formula;
      readonly constants: Readonly<Record<string, number>>;
    };

export interface Initial {
  readonly aqueous: 'barren' | 'as entering' | readonly number[];
  readonly organic: 'as entering' | readonly number[];
}

export interface Train {
  readonly name: string;
  readonly aqueous: { readonly from: string; readonly to: string };
  readonly organic: { readonly from: string; readonly to: string };
  readonly stages: readonly Stage[];
  /** One for each solute; null: the solute does not transfer in this train. */
  readonly equilibrium: readonly (Law | null)[];
  readonly initial: Initial;
}

export interface Change {
  /** s from the start of the run. */
  readonly at: number;
  /** Path of the input that changes. */
  readonly quantity: string;
  readonly how:
    | { readonly to: number }
    | { readonly by: number; readonly relative: boolean }
    | { readonly follow: { readonly times: readonly number[]; readonly values: readonly number[] } };
  /** s of the ramp in (and out again). */
  readonly over: number;
  /** s from `at` to the start of the return; null: to the end. */
  readonly lasts: number | null;
  readonly words: string;
}

export interface Limit {
  readonly stream: string;
  readonly quantity: string;
  readonly side: 'below' | 'above';
  readonly value: number;
}

export interface Scenario {
  readonly title: string;
  readonly about: string;
  readonly solutes: readonly string[];
  readonly species: readonly string[];
  readonly feeds: readonly Feed[];
  readonly tanks: readonly Tank[];
  readonly trains: readonly Train[];
  /** kg of species set free per kg of solute extracted: releases[solute][species]. */
  readonly releases: readonly (readonly number[])[];
  readonly start: 'barren' | 'steady';
  readonly horizon: number;
  readonly recordEvery: number;
  readonly upsets: readonly Change[];
  readonly limits: readonly Limit[];
}
