import type { Kernel } from '../math/kernel.ts';
import type { Network } from '../scenario/network.ts';
import type { Phase, Scenario } from '../scenario/scenario.ts';
import type { Named, Place, SteadyRow } from '../solve/system.ts';
import { carried, concentration, mixerConcentration } from './kernels.ts';
import { Ledger, type Ref } from './ledger.ts';
import { mixerSpecies, speciesConcentration } from './released.ts';

/** Share of a vessel below which it counts as nearly empty. */
export const NEARLY_EMPTY = 0.01;

/** A well-mixed part of one phase: its places (solutes, then for an aqueous part the carriers w), and 1/volume. */
export interface Part {
  readonly phase: Phase;
  readonly path: string;
  readonly places: readonly Ref[];
  readonly perVolume: Ref;
}

/** Where a stream comes from: its flow, and what it takes along. */
export interface Source {
  readonly flow: Ref;
  /** Writes the fluxes of all components of the phase to the places given (null: leaves the balance). */
  send(to: readonly (Ref | null)[]): void;
  /** How the concentration of component k at the source is computed. */
  content(k: number): { readonly kernel: Kernel; readonly args: readonly Ref[] };
}

/** What every writer of a piece of plant needs: the ledger, the scenario, and a few shared refs. */
export class Book {
  readonly ledger = new Ledger();
  readonly s: Scenario;
  readonly net: Network;
  readonly solutes: number;
  /** releases[solute][species] as parameters, null where zero. */
  readonly releases: readonly (readonly (Ref | null)[])[];
  /** Typical concentration of each component, kg/m³. */
  readonly typical: readonly number[];
  readonly inputValues: number[] = [];
  readonly initial: number[] = [];
  #plain = new Map<number, Ref>();

  constructor(s: Scenario, net: Network) {
    this.s = s;
    this.net = net;
    this.solutes = s.solutes.length;
    this.releases = s.releases.map((row, i) =>
      row.map((r, k) =>
        r === 0 ? null : this.ledger.parameter(`releases.${s.solutes[i]}.${s.species[k]}`, 'kg/kg', r),
      ),
    );
    this.typical = typicalContent(s);
  }

  /** Components of a phase: solutes, and in the aqueous the species. */
  components(phase: Phase): number {
    return phase === 'aqueous' ? this.solutes + this.s.species.length : this.solutes;
  }

  name(k: number): string {
    return k < this.solutes ? this.s.solutes[k] : this.s.species[k - this.solutes];
  }

  place(spec: Place, initial: number, steady?: SteadyRow): Ref {
    this.initial.push(initial);
    return this.ledger.place(spec, steady);
  }

  input(spec: Named, value: number): Ref {
    this.inputValues.push(value);
    return this.ledger.input(spec);
  }

  /** A plain number as parameter; equal numbers share one. */
  number(value: number): Ref {
    const found = this.#plain.get(value) ?? this.ledger.parameter(`number ${value}`, '', value);
    this.#plain.set(value, found);
    return found;
  }

  /** Places for all components of a part of volume `volume` m³ that starts with `content` kg/m³. */
  amounts(path: string, phase: Phase, volume: number, content: readonly number[], steady?: SteadyRow): Ref[] {
    return Array.from({ length: this.components(phase) }, (_, k) =>
      this.place(
        {
          path: `${path}.${phase}.${this.name(k)}`,
          unit: 'kg',
          kind: 'amount',
          scale: this.typical[k] * volume * NEARLY_EMPTY,
          floor: 0,
        },
        volume * this.carrier(k, phase, content),
        steady,
      ),
    );
  }

  /** kg/m³ of what is booked for component k: the solute itself, or w = species + Σ r·solute. */
  carrier(k: number, phase: Phase, content: readonly number[]): number {
    if (k < this.solutes || phase === 'organic') return content[k];
    const species = k - this.solutes;
    return content[k] + this.s.releases.reduce((sum, row, i) => sum + row[species] * content[i], 0);
  }

  /** Release parameter and place of each solute that releases species number `species`. */
  releasing(species: number, places: readonly Ref[]): Ref[] {
    return this.releases.flatMap((row, i) => (row[species] === null ? [] : [row[species], places[i]]));
  }

  /** A flow that leaves a well-mixed part with its composition. */
  sourceOf(part: Part, flow: Ref): Source {
    return {
      flow,
      send: (to) => {
        part.places.forEach((m, k) => {
          this.ledger.flux(carried, [flow, m, part.perVolume], { from: m, to: to[k] });
        });
      },
      content: (k) => this.contentOf(part, k),
    };
  }

  contentOf(part: Part, k: number): { kernel: Kernel; args: Ref[] } {
    if (k < this.solutes) return { kernel: concentration, args: [part.places[k], part.perVolume] };
    const bound = this.releasing(k - this.solutes, part.places);
    return {
      kernel: speciesConcentration(bound.length / 2),
      args: [part.places[k], part.perVolume, ...bound],
    };
  }

  /** The same for a mixer phase, whose volume may vanish. */
  mixerContentOf(
    places: readonly Ref[],
    volume: Ref,
    least: Ref,
    k: number,
  ): { kernel: Kernel; args: Ref[] } {
    if (k < this.solutes) return { kernel: mixerConcentration, args: [places[k], volume, least] };
    const bound = this.releasing(k - this.solutes, places);
    return { kernel: mixerSpecies(bound.length / 2), args: [places[k], volume, least, ...bound] };
  }

  /** Output of a concentration under a path. */
  show(path: string, k: number, from: { kernel: Kernel; args: readonly Ref[] }): void {
    const spec = { path: `${path}.${this.name(k)}`, unit: 'kg/m^3', scale: this.typical[k] };
    this.ledger.output(spec, from.kernel, ...from.args);
  }
}

/** The largest concentration of each component that the scenario names; 1 kg/m³ where it names none. */
function typicalContent(s: Scenario): number[] {
  const n = s.solutes.length + s.species.length;
  const given = [
    ...s.feeds.map((f) => f.content),
    ...s.tanks.map((t) => t.content),
    ...s.trains.flatMap((t) => [t.initial.aqueous, t.initial.organic].filter((c) => typeof c !== 'string')),
  ];
  return Array.from({ length: n }, (_, k) => {
    const largest = Math.max(0, ...given.map((c) => c[k] ?? 0));
    return largest > 0 ? largest : 1;
  });
}
