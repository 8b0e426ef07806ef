import type { Commissioning } from './commissioning.ts';
import type { Loop } from './loops.ts';
import type { DropSizeName } from './plain.ts';
import type { Rehearsing } from './rehearsing.ts';

/** A checked scenario: plain data, SI inside (m, s, kg, kg/m³, m³/s). Names are the user's own. */

export type Phase = 'aqueous' | 'organic';

/** Keys from the top of the file to a value: errors found later are traced to their line by it. */
export type Path = readonly (string | number)[];

export interface Feed {
  readonly name: string;
  readonly phase: Phase;
  /** m³/s of carrier. */
  readonly flow: number;
  /** kg/m³, solutes first, then species, in the scenario's order. What neutralises a species counts as less than none. */
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
  /** A feed that enters as well, against losses. */
  readonly makeUp: string | null;
  /** Share of the other phase that is passed on with the tank's stream; the rest stays as bottoms. */
  readonly passes: number;
  /** What is taken out of it (by electrolysis, precipitation …), solute by solute; null: nothing. */
  readonly removes: readonly (Removal | null)[];
}

/** A solute that leaves the plant from a tank, and what it gives back to the liquor. */
export interface Removal {
  /** kg/s, or the share of what flows in that does not flow out again. */
  readonly how: { readonly rate: number } | { readonly share: number };
  /** kg of each species returned per kg removed; null: what its extraction sets free. */
  readonly returns: readonly number[] | null;
}

/** What is taken of a stream: a share of it, or a flow in m³/s (all there is where that is less). */
export type Take = { readonly share: number } | { readonly flow: number };

export interface Branch {
  readonly name: string;
  readonly take: Take;
}

/** A stream that divides; `rest` takes what the branches leave. */
export interface Split {
  readonly stream: string;
  readonly branches: readonly Branch[];
  readonly rest: string;
}

/** Streams that run together into one. */
export interface Blend {
  readonly name: string;
  readonly of: readonly string[];
}

/** A stream drawn off a settler. */
export interface Draw extends Branch {
  readonly phase: Phase;
}

/** One vessel without flow: phases stirred at a given ratio, as in the laboratory. */
export interface Batch {
  readonly name: string;
  readonly mixer: Mixer;
  /** Organic share of the vessel. */
  readonly organicShare: number;
  readonly content: Readonly<Record<Phase, readonly number[]>>;
  readonly equilibrium: readonly (Law | null)[];
}

export interface Impeller {
  /** 1/s */
  readonly speed: number;
  /** m: impeller and vessel. */
  readonly diameter: number;
  readonly vessel: number;
  readonly powerNumber: number;
  readonly drops: DropSizeName;
}

export type Transfer =
  | { readonly given: 'ka'; readonly ka: number; readonly fixed: boolean }
  | { readonly given: 'efficiency'; readonly efficiency: number }
  | { readonly given: 'impeller'; readonly impeller: Impeller };

export interface Mixer {
  /** m³ */
  readonly volume: number;
  readonly continuity: Phase;
  /** The phase whose overall coefficient and concentration difference drive the transfer. */
  readonly side: Phase;
  readonly transfer: Transfer;
  /** The agitator also lifts what enters: stopped, it stops the flows through its train. */
  readonly pumps: boolean;
  /** Organic share of the mixer at which the continuous phase flips: below `low` aqueous, above `high` organic. */
  readonly inversion: { readonly low: number; readonly high: number } | null;
  /** Organic share of a mixer without a settler; null: that of the flows at time zero. */
  readonly organicShare: number | null;
  /** With weirs: length of its overflow and plan area, m and m². */
  readonly overflow: { readonly length: number; readonly area: number };
}

/** Dispersion band under one continuity: thickness at one specific flow of the dispersed phase, and the law through it. */
export interface BandPoint {
  /** m */
  readonly thickness: number;
  /** m³/(m²·s) */
  readonly at: number;
  readonly law: { readonly exponent: number } | { readonly floodsAt: number };
}

export interface Band extends BandPoint {
  /** Dispersed share in the band. */
  readonly holdUp: number;
  /** Factor of a mesh or plate coalescer on the thickness. */
  readonly coalescer: number;
  /** The other continuity, where it was measured. */
  readonly other: BandPoint | null;
}

/** Volume of one phase carried in the other, at design throughput. */
export interface CarryPoint {
  readonly organicInAqueous: number;
  readonly aqueousInOrganic: number;
}

export interface Carry extends CarryPoint {
  /** Grows with the throughput to this power. */
  readonly exponent: number;
  readonly other: CarryPoint | null;
}

/** m */
export interface Weirs {
  readonly organicLength: number;
  readonly aqueousLength: number;
  /** Height of the underflow port above the floor. */
  readonly port: number;
  /** Head lost in the aqueous leg. */
  readonly loss: number;
}

export interface Settler {
  /** m³ of each layer at design hold-up. */
  readonly aqueous: number;
  readonly organic: number;
  readonly parts: number;
  /** m², null where only volumes were given. */
  readonly area: number | null;
  /** Share of the flow into a layer that goes straight to its outlet. */
  readonly shortCircuit: number;
  readonly band: Band | null;
  readonly carry: Carry | null;
  readonly weirs: Weirs | null;
}

export interface Stage {
  readonly mixer: Mixer;
  /** Without a settler all its figures are zero and it has no parts. */
  readonly settler: Settler;
  /** Streams that enter its mixer from outside the train. */
  readonly takes: readonly string[];
  /** Streams drawn off what leaves it. */
  readonly draws: readonly Draw[];
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

/** Settled phase returned to its own mixer: a flow in m³/s, or what holds an organic-to-aqueous ratio there. */
export type Recycle = { readonly phase: Phase; readonly flow: number } | { readonly hold: number };

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
  readonly hydraulics: 'full' | 'weirs';
  readonly recycle: Recycle | null;
  readonly arrangement: Arrangement;
  /** Stages without settlers: flow back to the neighbour, over the flow onward of the same phase. */
  readonly backFlow: Readonly<Record<Phase, number>>;
}

/** How the phases pass the stages. Cross-current: the fresh phase is shared out over all stages, summing to 1. */
export type Arrangement =
  | { readonly kind: 'counter-current' }
  | { readonly kind: 'co-current' }
  | { readonly kind: 'cross-current'; readonly fresh: Phase; readonly shares: readonly number[] };

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
  /** A quantity of the stream, or `<quantity> / <stream>.<quantity>`: a ratio to another one. */
  readonly quantity: string;
  readonly side: 'below' | 'above';
  readonly value: number;
  /** s from which on it counts. */
  readonly from: number;
}

/** A state kept by an earlier run. */
export interface SavedState {
  readonly file: string;
  readonly topology: string;
  readonly places: readonly string[];
  readonly values: readonly number[];
  /** m³ that each amount stood in; null where that is no question. */
  readonly volumes?: readonly (number | null)[];
  /** Inputs that events had set, by path. */
  readonly modes: Readonly<Record<string, number>>;
}

/** Physical properties, SI; what nobody stated is null, and refused where it is needed. */
export interface Properties {
  readonly density: Readonly<Record<Phase, number | null>>;
  readonly viscosity: Readonly<Record<Phase, number | null>>;
  readonly tension: number | null;
  /** m²/s by solute. */
  readonly diffusivity: readonly (Readonly<Record<Phase, number>> | null)[];
}

export interface Scenario {
  readonly title: string;
  readonly about: string;
  readonly solutes: readonly string[];
  readonly species: readonly string[];
  readonly feeds: readonly Feed[];
  readonly tanks: readonly Tank[];
  readonly trains: readonly Train[];
  readonly splits: readonly Split[];
  readonly blends: readonly Blend[];
  readonly batches: readonly Batch[];
  /** kg of species set free per kg of solute extracted: releases[solute][species]. */
  readonly releases: readonly (readonly number[])[];
  readonly start: 'barren' | 'steady' | 'empty' | SavedState;
  readonly properties: Properties;
  readonly horizon: number;
  readonly recordEvery: number;
  readonly upsets: readonly Change[];
  readonly limits: readonly Limit[];
  /** What is stated for the commissioning. */
  readonly commissioning?: Commissioning;
  /** What is stated for the rehearsal of upsets. */
  readonly rehearsing?: Rehearsing;
  /** Control loops; none where nothing is stated. */
  readonly loops?: readonly Loop[];
}
