import type { Phase, Train } from '../scenario/scenario.ts';
import { type Book, type Content, NEARLY_EMPTY, type Part, type Sink } from './book.ts';
import type { Chemistry } from './chemistry.ts';
import { writeTransfer } from './contact.ts';
import type { TrainDesign } from './design.ts';
import { forBoth, type Of, otherPhase, PHASES } from './flow.ts';
import type { Flows } from './flows.ts';
import {
  available,
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
import { route } from './route.ts';
import { writeStageOutputs } from './stage-outputs.ts';
import { stagePlaces } from './stage-places.ts';
import type { Streams } from './streams.ts';
import { just, type Sum, sums } from './sum.ts';
import { carriedOut, clear, type Nominal, openVessel, shutByBypass, type Vessel } from './vessel.ts';

/** The laws of the train, and where their numbers stand. */
export interface Laws {
  readonly chemistry: Chemistry;
  readonly numbers: readonly Ref[];
}

/** What a train must know of the rest of the plant. */
export interface TrainContext {
  readonly index: number;
  readonly design: TrainDesign;
  /** Flows into a stage as feeds and pumps set them. */
  nominal(j: number): Nominal;
  readonly laws: Laws;
  readonly start: Of<readonly number[]>;
  /** Whether anything can change its flows in a run. */
  readonly moves: boolean;
  /** Paths of inputs that change. */
  readonly moving: ReadonlySet<string>;
  /** Flows and streams of the whole plant. Asked only when all trains have their places. */
  streams(): Streams;
}

/**
 * A train of stages. It is written in the order in which things depend on each other: places, volumes and bands, and
 * what they send with the other phase (the constructor), mixers and layers (`run`), and last the fluxes between
 * stages (`join`). Where the phases go stands in `route.ts`, how much of them flows in `flows.ts`.
 */
export class TrainWriter {
  readonly vessels: readonly Vessel[];
  readonly #book: Book;
  readonly #train: Train;
  readonly #c: TrainContext;
  readonly #nominal: readonly Nominal[];
  readonly #carried: readonly Of<Ref | null>[];
  readonly #bypass: readonly Of<Ref | null>[];
  /** The last part of each layer: what leaves. */
  #last: readonly Of<Part>[] = [];

  constructor(book: Book, train: Train, c: TrainContext) {
    this.#book = book;
    this.#train = train;
    this.#c = c;
    this.#nominal = train.stages.map((_, j) => c.nominal(j));
    const states = c.moves || train.stages.some((q) => q.settler.band !== null);
    const opened = train.stages.map((stage, j) => {
      const d = c.design.stages[j];
      const places = stagePlaces(book, train, j, stage, d, c.start, states);
      const flips = stage.mixer.inversion !== null || c.moving.has(`${places.path}.continuity`);
      return openVessel(book, train, j, d, places, this.#nominal[j], flips);
    });
    this.#bypass = opened.map((v) =>
      forBoth((phase) =>
        c.moving.has(`${v.path}.${phase} bypass`)
          ? book.input({ path: `${v.path}.${phase} bypass`, unit: '', scale: 1 }, 0)
          : null,
      ),
    );
    this.vessels = opened.map((v, j) => shutByBypass(book, v, this.#bypass[j]));
    this.#carried = this.vessels.map((v, j) => carriedOut(book, v, this.#nominal[j]));
  }

  get moves(): boolean {
    return this.#c.moves || this.vessels.some((v) => v.band !== null || v.outlets !== null);
  }

  get #flows(): Flows<Sum> {
    return this.#c.streams().flows;
  }

  /** What leaves a stage with the stream of the other phase. */
  carriedOut(j: number): Of<Sum> {
    return forBoth((phase) => {
      const ref = this.#carried[j][phase];
      return ref === null ? sums.none : just(ref);
    });
  }

  /** What weirs let pass; null in full vessels. */
  outlets(j: number): Of<Sum> | null {
    const { outlets } = this.vessels[j];
    return outlets === null ? null : forBoth((phase) => just(outlets[phase]));
  }

  /** Whether a phase is led past a stage, 0 … 1; null where it never is. */
  bypass(phase: Phase, j: number): Ref | null {
    return this.#bypass[j][phase];
  }

  /** Concentration of what leaves stage j and what is led past it. */
  content(phase: Phase, j: number, k: number): Content {
    const own = this.#book.contentOf(this.#last[j][phase], k);
    const bypass = this.#bypass[j][phase];
    if (bypass === null) return own;
    const past = this.#c.streams().entering(this.#c.index, phase, j, k);
    const both = [own, past].map((c) => this.#book.signal(c.kernel, ...c.args));
    return { kernel: chosen, args: [bypass, both[1], both[0]] };
  }

  /** Flow back from a settler to its own mixer; a layer with a level gives no more than it holds. */
  #recycled(v: Vessel, phase: Phase, nominal: Nominal): Ref | null {
    const r = this.#train.recycle;
    if (r === null || ('phase' in r && r.phase !== phase)) return null;
    const book = this.#book;
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
    this.#last = this.vessels.map((v, j) => (isCell(v) ? this.#runCell(v) : this.#runStage(v, j)));
  }

  /** A stage without settler keeps its hold-ups: each phase leaves with the composition that it has there. */
  #runCell(v: Vessel): Of<Part> {
    const book = this.#book;
    const { path, design, places, stage } = v;
    const held = forBoth((phase) =>
      book.ledger.parameter(`${path}.mixer.${phase}.volume`, 'm^3', design.mixer[phase]),
    );
    const last = forBoth((phase): Part => {
      const perVolume = book.signal(book.perVolumeKernel, held[phase], v.least);
      return { phase, path: `${path}.mixer`, places: places.mixer[phase], perVolume };
    });
    this.#contact(v, stage.mixer, held);
    const none = forBoth(() => null);
    writeStageOutputs(book, v, { mixer: held, layer: held, last, carried: none });
    return last;
  }

  /** Transfer in the mixer of a stage, and what is said where its laws leave their range. */
  #contact(v: Vessel, settings: Train['stages'][number]['mixer'], mixer: Of<Ref>): void {
    const { path, design, places, least, continuity } = v;
    const book = this.#book;
    writeTransfer(book, path, settings, this.#c.laws, design, places.mixer, { mixer, least, continuity });
    writeRangeGuards(book, this.#train.equilibrium, path, places.mixer, mixer, least);
    writeSpeciesGuards(book, path, places.mixer.aqueous, mixer.aqueous, least);
  }

  #runStage(v: Vessel, j: number): Of<Part> {
    const book = this.#book;
    const { stage, path, design, places } = v;
    const carriedHere = this.#carried[j];
    const recycle = forBoth((phase) => this.#recycled(v, phase, this.#nominal[j]));
    const at = (phase: Phase) => this.#flows.stage(this.#c.index, phase, j);
    const entering =
      v.outlets === null
        ? forBoth((phase) => {
            const { enters, carriedIn } = at(phase);
            const main = this.#through(book.total(enters), this.#bypass[j][phase]);
            const whole = sums.add(just(main), carriedIn, ...(recycle[phase] ? [just(recycle[phase])] : []));
            return book.total(whole);
          })
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
    this.#contact(v, stage.mixer, mixer);

    const leaving = forBoth((phase) => book.signal(product, mixer[phase], rate));
    const main = forBoth((phase) => this.#own(v, phase, j));
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
    writeStageOutputs(book, v, { mixer, layer, last, carried: carriedHere });
    return last;
  }

  /** Main flow out of a stage's own settler, without what is led past it. */
  #own(v: Vessel, phase: Phase, j: number): Ref {
    if (v.outlets) return v.outlets[phase];
    const { leaves } = this.#flows.stage(this.#c.index, phase, j);
    return this.#through(this.#book.total(leaves.flow), this.#bypass[j][phase]);
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

  /** Where the train's own stream of a phase goes. */
  entry(phase: Phase): Sink {
    const { order, enters } = route(this.#train, phase);
    const book = this.#book;
    const into = order
      .filter((j) => enters[j] > 0)
      .map((j) =>
        enters[j] === 1 ? this.into(phase, j) : book.portionOf(this.into(phase, j), book.number(enters[j])),
      );
    return { aqueous: into.flatMap((q) => q.aqueous), organic: into.flatMap((q) => q.organic) };
  }

  /** Where a stream of a phase goes that enters stage j: into its mixer, or past it with all that it carries. */
  into(phase: Phase, j: number): Sink {
    const book = this.#book;
    const own = this.#ownMixer(this.vessels[j]);
    const bypass = this.#bypass[j][phase];
    if (bypass === null) return own;
    const stays = book.portionOf(own, book.signal(rest, bypass));
    const past = book.portionOf(this.#beyond(phase, j), bypass);
    return forBoth((which) => [...stays[which], ...past[which]]);
  }

  /** Where the stream of a phase goes that leaves stage j: draws, then the next stage or out of the train. */
  #beyond(phase: Phase, j: number): Sink {
    const streams = this.#c.streams();
    const draws = this.#train.stages[j].draws.filter((d) => d.phase === phase);
    const next = route(this.#train, phase).after(j);
    return streams.divided(draws, () =>
      next === null ? streams.sink(this.#train[phase].to) : this.into(phase, next),
    );
  }

  /** Sends what leaves stage j with the stream of a phase. */
  #send(phase: Phase, j: number): void {
    const book = this.#book;
    const v = this.vessels[j];
    const last = this.#last[j];
    const other = otherPhase(phase);
    const to = this.#beyond(phase, j);
    book.send(last[phase], this.#own(v, phase, j), v.places.volumes.layer?.[phase] ?? null, to);
    const fromLayer = this.#withoutFlood(v, this.#carried[j], other);
    if (fromLayer) book.send(last[other], fromLayer, v.places.volumes.layer?.[other] ?? null, to);
    const flood = v.band === null ? null : other === 'aqueous' ? v.band.floodAqueous : v.band.floodOrganic;
    if (flood && v.places.band && v.places.volumes.band) {
      const perVolume = this.#perBand(v, v.places.volumes.band[other]);
      const part: Part = { phase: other, path: `${v.path}.band`, places: v.places.band[other], perVolume };
      book.send(part, flood, v.places.volumes.band[other], to);
    }
  }

  /** Flow back between neighbours without settlers: β times the net flow that passes, and as much more onward. */
  #exchange(phase: Phase, j: number): void {
    const beta = this.#train.backFlow[phase];
    const next = route(this.#train, phase).after(j);
    if (beta === 0 || next === null) return;
    const book = this.#book;
    const net = this.#flows.stage(this.#c.index, phase, j).onward.flow;
    const both = book.total(sums.scale(net, beta));
    book.send(this.#last[j][phase], both, null, this.#ownMixer(this.vessels[next]));
    book.send(this.#last[next][phase], both, null, this.#ownMixer(this.vessels[j]));
  }

  /** Fluxes between the stages, and out of the train. */
  join(): void {
    this.vessels.forEach((_, j) => {
      for (const phase of PHASES) {
        this.#send(phase, j);
        this.#exchange(phase, j);
      }
    });
  }
}

const isCell = (v: Vessel): boolean => v.stage.settler.parts === 0;
