import type { Kernel } from '../math/kernel.ts';
import type { Network } from '../scenario/network.ts';
import type { Phase, Scenario } from '../scenario/scenario.ts';
import type { Named, Place, SteadyRow } from '../solve/system.ts';
import type { Of } from './flow.ts';
import { concentration, drained, passed, perVolumeOf, product, same, signedSum } from './kernels.ts';
import { Ledger, type Ref } from './ledger.ts';
import { speciesConcentration } from './released.ts';
import { isNothing, just, type Sum } from './sum.ts';

/** Share of a vessel below which it counts as nearly empty. */
export const NEARLY_EMPTY = 0.01;

/** A well-mixed part of one phase: its places (solutes, then for an aqueous part the carriers w), and 1/volume. */
export interface Part {
  readonly phase: Phase;
  readonly path: string;
  readonly places: readonly Ref[];
  readonly perVolume: Ref;
}

/** Where a phase of a stream goes, or a share of it: places (null: out of the balance), and where its volume counts. */
export interface Inlet {
  /** Null: all of it. */
  readonly share: Ref | null;
  readonly places: readonly (Ref | null)[];
  readonly volume: Ref | null;
}

/** Where a stream goes: its main phase, and what it carries of the other. */
export type Sink = Of<readonly Inlet[]>;

/** Where a stream comes from, and what it takes along. */
export interface Source {
  /** Writes the fluxes of all components and volumes. */
  send(to: Sink): void;
  /** How the concentration of component k of the main phase is computed. */
  content(k: number): Content;
}

export interface Content {
  readonly kernel: Kernel;
  readonly args: readonly Ref[];
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
  readonly perVolumeKernel = perVolumeOf;
  #plain = new Map<number, Ref>();
  #totals = new Map<string, Ref>();
  #portions = new Map<string, Ref>();
  #running = new Map<string, Ref>();

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

  /** The value of a sum; equal sums share one. */
  total({ parts }: Sum): Ref {
    const list = [...parts.values()];
    if (list.length === 0) return this.number(0);
    if (list.length === 1 && list[0].factor === 1) return list[0].ref;
    const key = [...parts].map(([k, { factor }]) => `${factor} ${k}`).join();
    const found = this.#totals.get(key);
    if (found) return found;
    const plus = list.filter((q) => q.factor > 0);
    const ordered = [...plus, ...list.filter((q) => q.factor < 0)];
    const refs = ordered.map(({ ref, factor }) =>
      Math.abs(factor) === 1 ? ref : this.signal(product, ref, this.number(Math.abs(factor))),
    );
    const signs = ordered.map(({ factor }) => (factor > 0 ? '+' : '-')).join('');
    const made = signs === '+' ? refs[0] : this.signal(signedSum(signs), ...refs);
    this.#totals.set(key, made);
    return made;
  }

  /** A share of a sum. */
  portion(s: Sum, share: Ref): Sum {
    if (isNothing(s)) return s;
    const whole = this.total(s);
    const key = `${whole.space}${whole.index} ${share.space}${share.index}`;
    const made = this.#portions.get(key) ?? this.signal(product, whole, share);
    this.#portions.set(key, made);
    return just(made);
  }

  /** A sink for a share of a stream. */
  portionOf(to: Sink, share: Ref): Sink {
    const part = (list: readonly Inlet[]): Inlet[] =>
      list.map((i) => ({ ...i, share: i.share === null ? share : this.signal(product, share, i.share) }));
    return { aqueous: part(to.aqueous), organic: part(to.organic) };
  }

  /** Places for all components of a part of `volume` m³, of which a share is filled with `content` kg/m³. */
  amounts(
    path: string,
    phase: Phase,
    volume: number,
    content: readonly number[],
    filled = 1,
    steady?: SteadyRow,
  ): Ref[] {
    return Array.from({ length: this.components(phase) }, (_, k) =>
      this.place(
        {
          path: `${path}.${phase}.${this.name(k)}`,
          unit: 'kg',
          kind: 'amount',
          scale: this.typical[k] * volume * NEARLY_EMPTY,
          // More base than acid is an event, not an impossible state.
          floor: k >= this.solutes && this.neutralised(k - this.solutes) ? null : 0,
        },
        filled * volume * this.carrier(k, phase, content),
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

  /** A signal with one value. */
  signal(k: Kernel, ...args: Ref[]): Ref {
    return this.ledger.signal(k, ...args)[0];
  }

  /** Everything in a part leaves at `rate` (1/s), to places of its phase. */
  drain(part: { readonly places: readonly Ref[] }, rate: Ref, to: readonly (Ref | null)[]): void {
    part.places.forEach((m, k) => {
      this.ledger.flux(drained, [rate, m], { from: m, to: to[k] });
    });
  }

  /** A flow that leaves a well-mixed part with its composition, split over the inlets of a sink. */
  send(part: Part, flow: Ref, from: Ref | null, to: Sink): void {
    for (const inlet of to[part.phase]) {
      const q = inlet.share === null ? flow : this.signal(product, flow, inlet.share);
      this.drain(part, this.signal(product, q, part.perVolume), inlet.places);
      this.pass(q, from, inlet.volume);
    }
  }

  /** Volume that goes along with a flow; nothing is booked where neither end counts it. */
  pass(flow: Ref, from: Ref | null, to: Ref | null): void {
    if (from !== null || to !== null) this.ledger.flux(passed, [flow], { from, to });
  }

  contentOf(part: { readonly places: readonly Ref[]; readonly perVolume: Ref }, k: number): Content {
    if (k < this.solutes) return { kernel: concentration, args: [part.places[k], part.perVolume] };
    const bound = this.releasing(k - this.solutes, part.places);
    return {
      kernel: speciesConcentration(bound.length / 2),
      args: [part.places[k], part.perVolume, ...bound],
    };
  }

  /** Output of a concentration under a path. */
  show(path: string, k: number, from: Content): void {
    const spec = { path: `${path}.${this.name(k)}`, unit: 'kg/m^3', scale: this.typical[k] };
    this.ledger.output(spec, from.kernel, ...from.args);
  }

  /** Output of a value that a signal or an input already has. */
  showValue(path: string, unit: string, scale: number, ref: Ref): void {
    this.ledger.output({ path, unit, scale }, same, ref);
  }

  /** Whether any feed uses up a species. */
  neutralised(species: number): boolean {
    return this.s.feeds.some((f) => f.content[this.solutes + species] < 0);
  }

  /** Whether the agitator of a stage runs: 1 or 0. */
  running(path: string): Ref {
    const found = this.#running.get(path) ?? this.input({ path: `${path}.mixer`, unit: '', scale: 1 }, 1);
    this.#running.set(path, found);
    return found;
  }

  /** Diffusivities of a solute, aqueous and organic, m²/s. */
  diffusivities(solute: number): Ref[] {
    const d = this.s.properties.diffusivity[solute];
    return [this.number(d?.aqueous ?? Number.NaN), this.number(d?.organic ?? Number.NaN)];
  }
}

/** The largest concentration of each component that the scenario names; 1 kg/m³ where it names none. */
function typicalContent(s: Scenario): number[] {
  const n = s.solutes.length + s.species.length;
  const given = [
    ...s.feeds.map((f) => f.content),
    ...s.tanks.map((t) => t.content),
    ...s.batches.flatMap((b) => [b.content.aqueous, b.content.organic]),
    ...s.trains.flatMap((t) => [t.initial.aqueous, t.initial.organic].filter((c) => typeof c !== 'string')),
  ];
  return Array.from({ length: n }, (_, k) => {
    const largest = Math.max(0, ...given.map((c) => Math.abs(c[k] ?? 0)));
    return largest > 0 ? largest : 1;
  });
}
