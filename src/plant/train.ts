import type { Phase, Train } from '../scenario/scenario.ts';
import { type Book, type Content, NEARLY_EMPTY, type Part, type Sink, type Source } from './book.ts';
import type { Chemistry } from './chemistry.ts';
import { writeTransfer } from './contact.ts';
import type { TrainDesign } from './design.ts';
import { forBoth, type Of, otherPhase, PHASES, type StreamFlow } from './flow.ts';
import {
  available,
  balance,
  chosen,
  difference,
  drained,
  missingAqueous,
  missingOrganic,
  passed,
  product,
  rest,
  steadyHoldup,
  sum,
  turnover,
} from './kernels.ts';
import { type Feeder, writeLayer } from './layer.ts';
import type { Ref } from './ledger.ts';
import { writeRangeGuards, writeSpeciesGuards } from './range.ts';
import { writeStageOutputs } from './stage-outputs.ts';
import { stagePlaces } from './stage-places.ts';
import { carriedOut, clear, type Nominal, openVessel, shutByBypass, type Vessel } from './vessel.ts';

/** The laws of the train, and where their numbers stand. */
export interface Laws {
  readonly chemistry: Chemistry;
  readonly numbers: readonly Ref[];
}

/** What a train must know of the rest of the plant. */
export interface TrainContext {
  readonly design: TrainDesign;
  readonly nominal: Nominal;
  readonly laws: Laws;
  readonly start: Of<readonly number[]>;
  /** Whether anything can change its flows in a run. */
  readonly moves: boolean;
  /** Paths of inputs that change. */
  readonly moving: ReadonlySet<string>;
  /** Streams that enter, main flow and what they carry. Asked for only when all trains have their places. */
  inlet(phase: Phase): StreamFlow;
  /** Concentration of component k in the stream that enters. Asked for only when all trains run. */
  inletContent(phase: Phase, k: number): Content;
}

/** The last part of each layer, once the flows are known: what leaves. */
interface Running {
  readonly last: Of<Part>;
}

/**
 * A counter-current train. It is written in the order in which things depend on each other: places, volumes and
 * bands (`open`), streams out (`outlet`), mixers and layers (`run`), and last the fluxes between stages (`join`).
 */
export class TrainWriter {
  readonly vessels: readonly Vessel[];
  readonly #book: Book;
  readonly #train: Train;
  readonly #c: TrainContext;
  readonly #carried: readonly Of<Ref | null>[];
  readonly #bypass: readonly Of<Ref | null>[];
  #running: readonly Running[] = [];
  #outlets: Partial<Record<Phase, StreamFlow>> = {};

  constructor(book: Book, train: Train, c: TrainContext) {
    this.#book = book;
    this.#train = train;
    this.#c = c;
    const states = c.moves || train.stages.some((q) => q.settler.band !== null);
    const opened = train.stages.map((stage, j) => {
      const d = c.design.stages[j];
      const places = stagePlaces(book, train, j, stage, d, c.start, states);
      const flips = stage.mixer.inversion !== null || c.moving.has(`${places.path}.continuity`);
      return openVessel(book, train, j, d, places, c.nominal, flips);
    });
    this.#bypass = opened.map((v) =>
      forBoth((phase) =>
        c.moving.has(`${v.path}.${phase} bypass`)
          ? book.input({ path: `${v.path}.${phase} bypass`, unit: '', scale: 1 }, 0)
          : null,
      ),
    );
    this.vessels = opened.map((v, j) => shutByBypass(book, v, this.#bypass[j]));
    this.#carried = this.vessels.map((v) => carriedOut(book, v, c.nominal));
  }

  get moves(): boolean {
    return this.#c.moves || this.vessels.some((v) => v.band !== null || v.outlets !== null);
  }

  /** What the stream of a phase carries of the other one as it leaves the train. */
  carried(phase: Phase): Ref | null {
    return this.#carriedFrom(phase, this.#end(phase));
  }

  #carriedFrom(phase: Phase, j: number): Ref | null {
    const own = this.#carried[j]?.[otherPhase(phase)];
    if (own === undefined) return this.#c.inlet(phase).carried;
    const bypass = this.#bypass[j][phase];
    if (bypass === null) return own;
    const past = this.#carriedFrom(phase, this.#before(phase, j));
    if (past === null) return own;
    const led = this.#book.signal(product, bypass, past);
    return own === null ? led : this.#add(own, led);
  }

  /** The stage from which a phase comes to stage j; past the end where it comes from outside. */
  #before(phase: Phase, j: number): number {
    return phase === 'aqueous' ? j - 1 : j + 1;
  }

  /** What leaves stage j and what is led past it. Full vessels pass on what enters either way. */
  #leaves(phase: Phase, j: number): Ref {
    const v = this.vessels[j];
    if (v === undefined) return this.#c.inlet(phase).flow;
    if (v.outlets === null) return this.#main(phase, j);
    const bypass = this.#bypass[j][phase];
    if (bypass === null) return v.outlets[phase];
    const past = this.#book.signal(product, bypass, this.#leaves(phase, this.#before(phase, j)));
    return this.#add(v.outlets[phase], past);
  }

  /** Concentration of what leaves stage j and what is led past it. */
  #content(phase: Phase, j: number, k: number): Content {
    const running = this.#running[j];
    if (running === undefined) return this.#c.inletContent(phase, k);
    const own = this.#book.contentOf(running.last[phase], k);
    const bypass = this.#bypass[j][phase];
    if (bypass === null) return own;
    const past = this.#content(phase, this.#before(phase, j), k);
    const both = [own, past].map((c) => this.#book.signal(c.kernel, ...c.args));
    return { kernel: chosen, args: [bypass, both[1], both[0]] };
  }

  /** The stage at which a phase leaves the train. */
  #end(phase: Phase): number {
    return phase === 'aqueous' ? this.vessels.length - 1 : 0;
  }

  /** The stream of a phase that leaves the train. Full vessels pass on at once what enters. */
  outlet(phase: Phase): StreamFlow {
    const known = this.#outlets[phase];
    if (known) return known;
    const end = this.#end(phase);
    const carried = this.carried(phase);
    const flow = this.#leaves(phase, end);
    const made = { flow, carried };
    this.#outlets[phase] = made;
    return made;
  }

  /** Main flow of a phase that leaves stage j's settler, in full vessels: inlet + carried in − carried out. */
  #main(phase: Phase, j: number): Ref {
    const n = this.vessels.length;
    const inlet = this.#c.inlet(phase).flow;
    const step = phase === 'aqueous' ? 1 : -1;
    const first = phase === 'aqueous' ? 0 : n - 1;
    const out = this.#carried[first]?.[phase] ?? null;
    const into = this.#carriedInto(phase, j + step);
    if (out === into) return inlet;
    const zero = this.#book.number(0);
    return this.#book.signal(balance, inlet, into ?? zero, out ?? zero);
  }

  /** What stage j (or, past the end, the stream that enters there) sends of a phase with the other one. */
  #carriedInto(phase: Phase, j: number): Ref | null {
    if (j < 0 || j >= this.vessels.length) return this.#c.inlet(otherPhase(phase)).carried;
    return this.#carried[j][phase];
  }

  /** What enters mixer j of a phase besides recycle, in full vessels. */
  #mainInto(phase: Phase, j: number): Ref {
    const from = this.#before(phase, j);
    return this.vessels[from] === undefined ? this.#c.inlet(phase).flow : this.#main(phase, from);
  }

  /** Flow back from a settler to its own mixer; a layer with a level gives no more than it holds. */
  #recycled(v: Vessel, phase: Phase): Ref | null {
    const r = this.#train.recycle;
    if (r === null || ('phase' in r && r.phase !== phase)) return null;
    const book = this.#book;
    const { nominal } = this.#c;
    const missing = phase === 'aqueous' ? missingAqueous : missingOrganic;
    const wanted =
      'phase' in r
        ? book.number(r.flow)
        : book.signal(missing, nominal.aqueous, nominal.organic, book.number(r.hold));
    if (v.outlets === null || v.layer === null) return wanted;
    const least = book.number(v.design.layer[phase] * NEARLY_EMPTY);
    return book.signal(product, wanted, book.signal(available, v.layer[phase], least));
  }

  #add(...refs: (Ref | null)[]): Ref {
    const list = refs.filter((r): r is Ref => r !== null);
    return list.length === 1 ? list[0] : this.#book.signal(sum(list.length), ...list);
  }

  #through(flow: Ref, bypass: Ref | null): Ref {
    return bypass === null ? flow : this.#book.signal(product, flow, this.#book.signal(rest, bypass));
  }

  /** Mixers, transfer, bands and layers of all stages. */
  run(): void {
    this.#running = this.vessels.map((v, j) => this.#runStage(v, j));
  }

  #runStage(v: Vessel, j: number): Running {
    const book = this.#book;
    const { stage, path, design, places } = v;
    const carriedHere = this.#carried[j];
    const recycle = forBoth((phase) => this.#recycled(v, phase));
    const full = v.outlets === null;
    const next = (phase: Phase): number => (phase === 'aqueous' ? j + 1 : j - 1);
    const entering = full
      ? forBoth((phase) =>
          this.#add(
            this.#through(this.#mainInto(phase, j), this.#bypass[j][phase]),
            this.#carriedInto(phase, next(phase)),
            recycle[phase],
          ),
        )
      : null;

    const V = book.ledger.parameter(`${path}.mixer.full`, 'm^3', stage.mixer.volume);
    const still = (): Of<Ref> => {
      const e = entering as Of<Ref>;
      const organic = book.signal(steadyHoldup, e.aqueous, e.organic, V);
      return { organic, aqueous: book.signal(difference, V, organic) };
    };
    const mixer = v.mixer ?? still();
    const layer = v.layer ?? forBoth((phase) => clear(book, path, design, phase, mixer[phase]));
    const rate =
      v.rate ?? book.signal(turnover, (entering as Of<Ref>).aqueous, (entering as Of<Ref>).organic, V);
    if (entering && places.volumes.mixer.organic) {
      const Vo = places.volumes.mixer.organic;
      book.pass(entering.organic, null, Vo);
      book.ledger.flux(drained, [rate, Vo], { from: Vo, to: null });
    }
    const shares = { mixer, least: v.least, continuity: v.continuity };
    writeTransfer(book, path, stage.mixer, this.#c.laws, design, places.mixer, shares);
    writeRangeGuards(book, this.#train, path, places.mixer, mixer, v.least);
    writeSpeciesGuards(book, path, places.mixer.aqueous, mixer.aqueous, v.least);

    const leaving = forBoth((phase) => book.signal(product, mixer[phase], rate));
    const main = forBoth(
      (phase) => v.outlets?.[phase] ?? this.#through(this.#main(phase, j), this.#bypass[j][phase]),
    );
    const entrained = forBoth((phase) => this.#withoutFlood(v, carriedHere, phase));
    const out = forBoth((phase) => this.#add(main[phase], entrained[phase], recycle[phase]));
    const last = forBoth((phase) => {
      const { feeders, into } = this.#feedLayer(v, phase, mixer, rate, leaving[phase]);
      return writeLayer(book, path, phase, places.layers[phase], feeders, {
        volume: layer[phase],
        size: design.layer[phase],
        into,
        out: out[phase],
        moves: this.moves || recycle[phase] !== null || carriedHere[phase] !== null,
        shortCircuit: stage.settler.shortCircuit,
      });
    });
    for (const phase of PHASES) {
      const back = recycle[phase];
      if (back) book.send(last[phase], back, places.volumes.layer?.[phase] ?? null, this.#ownMixer(v));
    }
    writeStageOutputs(book, v, { mixer, layer, last, rate, carried: carriedHere });
    return { last };
  }

  /** Carried phase that comes out of the layer; what floods comes out of the band. */
  #withoutFlood(v: Vessel, carried: Of<Ref | null>, phase: Phase): Ref | null {
    const all = carried[phase];
    if (all === null || v.band === null) return all;
    const flood = phase === 'aqueous' ? v.band.floodAqueous : v.band.floodOrganic;
    return all === flood ? null : this.#book.signal(difference, all, flood);
  }

  /** What comes into a layer: from the mixer directly, or through the band. */
  #feedLayer(
    v: Vessel,
    phase: Phase,
    mixer: Of<Ref>,
    rate: Ref,
    leaving: Ref,
  ): { feeders: Feeder[]; into: Ref } {
    const book = this.#book;
    const { places, band } = v;
    const layerVolume = places.volumes.layer?.[phase] ?? null;
    const mixerVolume = places.volumes.mixer[phase];
    const fromMixer = v.outlets ? mixerVolume : null;
    if (band === null || places.band === null || places.volumes.band === null) {
      if (v.outlets) book.pass(leaving, fromMixer, layerVolume);
      return { feeders: [{ places: places.mixer[phase], rate }], into: leaving };
    }
    const inBand = places.volumes.band[phase];
    const into = book.signal(product, rate, band.enters);
    const aside = book.signal(product, rate, book.signal(rest, band.enters));
    const out = band[phase];
    const perVolume = this.#perBand(v, inBand);
    book.drain({ places: places.mixer[phase] }, into, places.band[phase]);
    book.ledger.flux(drained, [into, mixer[phase]], { from: fromMixer, to: inBand });
    const sideFlow = book.signal(product, mixer[phase], aside);
    if (v.outlets) book.pass(sideFlow, fromMixer, layerVolume);
    book.ledger.flux(passed, [out], { from: inBand, to: layerVolume });
    return {
      feeders: [
        { places: places.band[phase], rate: book.signal(product, out, perVolume) },
        { places: places.mixer[phase], rate: aside },
      ],
      into: book.signal(sum(2), out, sideFlow),
    };
  }

  /** One over the volume of a phase in the band. */
  #perBand(v: Vessel, held: Ref): Ref {
    const { aqueous, organic } = v.design.band;
    return this.#book.signal(this.#book.perVolumeKernel, held, this.#book.number(1e-3 * (aqueous + organic)));
  }

  #ownMixer(v: Vessel): Sink {
    const { mixer } = v.places.volumes;
    return forBoth((phase) => [
      { share: null, places: v.places.mixer[phase], volume: v.outlets ? mixer[phase] : null },
    ]);
  }

  /** Where a stream of a phase goes that enters stage j: into its mixer, or past it with all that it carries. */
  sink(phase: Phase, j: number, beyond: () => Sink): Sink {
    const v = this.vessels[j];
    if (v === undefined) return beyond();
    const own = this.#ownMixer(v);
    const bypass = this.#bypass[j][phase];
    if (bypass === null) return own;
    const past = this.sink(phase, phase === 'aqueous' ? j + 1 : j - 1, beyond);
    const stays = this.#book.signal(rest, bypass);
    return forBoth((which) => [
      ...own[which].map((i) => ({ ...i, share: stays })),
      ...past[which].map((i) => ({
        ...i,
        share: i.share === null ? bypass : this.#book.signal(product, bypass, i.share),
      })),
    ]);
  }

  /** The stage at which a phase enters the train. */
  first(phase: Phase): number {
    return phase === 'aqueous' ? 0 : this.vessels.length - 1;
  }

  /** The stream that leaves stage j's settler with a phase. */
  source(phase: Phase, j: number): Source {
    const book = this.#book;
    const v = this.vessels[j];
    const { last } = this.#running[j];
    const other = otherPhase(phase);
    const flow = v.outlets?.[phase] ?? this.#through(this.#main(phase, j), this.#bypass[j][phase]);
    const all = this.#carried[j][other];
    const fromLayer = this.#withoutFlood(v, this.#carried[j], other);
    const flood = v.band === null ? null : other === 'aqueous' ? v.band.floodAqueous : v.band.floodOrganic;
    return {
      phase,
      flow,
      carried: all,
      send: (to) => {
        book.send(last[phase], flow, v.places.volumes.layer?.[phase] ?? null, to);
        if (fromLayer) book.send(last[other], fromLayer, v.places.volumes.layer?.[other] ?? null, to);
        if (flood && v.places.band && v.places.volumes.band) {
          const perVolume = this.#perBand(v, v.places.volumes.band[other]);
          const part: Part = {
            phase: other,
            path: `${v.path}.band`,
            places: v.places.band[other],
            perVolume,
          };
          book.send(part, flood, v.places.volumes.band[other], to);
        }
      },
      content: (k) => this.#content(phase, j, k),
    };
  }

  /** Fluxes between the stages; what leaves at the ends goes to the sinks given. */
  join(ends: Of<() => Sink>): void {
    this.vessels.forEach((_, j) => {
      this.source('aqueous', j).send(this.sink('aqueous', j + 1, ends.aqueous));
      this.source('organic', j).send(this.sink('organic', j - 1, ends.organic));
    });
  }
}
