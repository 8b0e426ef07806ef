import type { Execution } from '../math/kernel.ts';
import { jointsOf } from '../scenario/joints.ts';
import { type Network, network, type Origin, type Stream } from '../scenario/network.ts';
import type { Phase, Scenario, Tank, Train } from '../scenario/scenario.ts';
import type { F, System } from '../solve/system.ts';
import { type Account, accounts } from './accounts.ts';
import { batchVolume, writeBatch } from './batch.ts';
import { Book, type Sink, type Source } from './book.ts';
import { FeedWriter, type Totals, totals } from './boundary.ts';
import { chemistry } from './chemistry.ts';
import { holdWhatOnlyCirculates } from './circulating.ts';
import { designs, setFlows, type TrainDesign } from './design.ts';
import { Entering } from './entering.ts';
import { forBoth, otherPhase, PHASES } from './flow.ts';
import { product, same } from './kernels.ts';
import type { Ref } from './ledger.ts';
import { ends, route } from './route.ts';
import { writeStreamFigures } from './stream-figures.ts';
import { Streams } from './streams.ts';
import { suitable } from './suitable.ts';
import { isNothing } from './sum.ts';
import { setByPump } from './symbols.ts';
import { TankWriter } from './tank.ts';
import { type Laws, TrainWriter } from './train.ts';

/** A plant ready to be solved: the System, its numbers at the start, and what is needed to read the answer. */
export interface Plant {
  readonly scenario: Scenario;
  readonly network: Network;
  readonly system: System;
  readonly parameters: F;
  /** Inputs before anything changes. */
  readonly inputs: F;
  /** The barren (or, with weirs, empty) start. */
  readonly barren: F;
  readonly accounts: readonly Account[];
  readonly designs: readonly TrainDesign[];
}

export interface AssembleOptions {
  /** Paths of the inputs that can change in a run; what never changes need not be a state. */
  readonly moving?: ReadonlySet<string>;
  /** Group by group, as the oracle does; as machine code where nothing is said. */
  readonly execution?: Execution;
}

/**
 * Scenario → System.
 *
 * @throws Refusal where streams do not join up, or where the equations are not made for what they join.
 */
export function assemble(s: Scenario, options: AssembleOptions = {}): Plant {
  const net = network(jointsOf(s));
  const plans = designs(s, net);
  suitable(s, net, plans);
  const book = new Book(s, net);
  const moving = options.moving ?? new Set(s.upsets.map((u) => u.quantity));
  const writer = new PlantWriter(s, net, book, moving, plans);
  writer.write();
  const books = accounts(book, writer.totals, writer.levels, writer.fixedVolume);
  holdWhatOnlyCirculates(book.ledger, books);
  writer.keepLoops();
  return {
    scenario: s,
    network: net,
    system: book.ledger.build(options.execution ?? null),
    parameters: Float64Array.from(book.ledger.parameterValues),
    inputs: Float64Array.from(book.inputValues),
    barren: Float64Array.from(book.initial),
    accounts: books,
    designs: plans,
  };
}

class PlantWriter {
  readonly totals: Totals[] = [];
  readonly levels: { phase: Phase; place: Ref }[] = [];
  /** m³ of each phase in vessels whose total never changes. */
  readonly fixedVolume = { aqueous: 0, organic: 0 };
  readonly designs: readonly TrainDesign[];
  readonly #s: Scenario;
  readonly #net: Network;
  readonly #book: Book;
  readonly #moving: ReadonlySet<string>;
  readonly #feeds: FeedWriter[] = [];
  readonly #pumps: { flow: Ref; dry: Ref | null }[] = [];
  readonly #tanks: TankWriter[] = [];
  readonly #trains: TrainWriter[] = [];
  readonly #outlets = new Map<string, Sink>();
  readonly #streams: Streams;
  readonly #isSetBy: ReturnType<typeof setByPump>;

  constructor(
    s: Scenario,
    net: Network,
    book: Book,
    moving: ReadonlySet<string>,
    plans: readonly TrainDesign[],
  ) {
    this.#s = s;
    this.#net = net;
    this.#book = book;
    this.#moving = moving;
    this.designs = plans;
    this.#isSetBy = setByPump(s, net);
    this.#streams = new Streams(s, net, book, moving, {
      origin: (m) => (m.kind === 'feed' ? this.#feeds[m.index].flow : this.#pumps[m.index].flow),
      train: (i) => this.#trains[i],
      content: (m, k) => this.#source(m).content(k),
      tankSink: (i) => this.#tanks[i].sink(() => this.#streams.sink(s.tanks[i].to)),
      outlet: (name) => this.#outlets.get(name) as Sink,
    });
  }

  write(): void {
    const { feeds, tanks, trains, batches } = this.#s;
    feeds.forEach((f, index) => {
      const writer = new FeedWriter(this.#book, f, (flow) => this.#gated(flow, { kind: 'feed', index }));
      this.#feeds.push(writer);
      this.totals.push(writer.totals);
    });
    tanks.forEach((t, index) => {
      this.#pumps[index] = t.flow === null ? { flow: this.#book.number(0), dry: null } : this.#pump(index);
    });
    const start = new Entering(this.#s, this.#net);
    trains.forEach((t, i) => {
      this.#trains[i] = this.#openTrain(t, i, start);
    });
    for (const [i, t] of tanks.entries()) this.#openTank(t, i);
    for (const out of this.#net.outlets) this.#outlets.set(out.name, this.#outlet(out));
    for (const t of this.#trains) t.run();
    for (const t of this.#trains) t.join();
    for (const { name, maker } of this.#net.streams.values())
      if (maker.kind === 'feed' || maker.kind === 'tank')
        this.#source({ kind: maker.kind, index: maker.index }).send(this.#streams.sink(name));
    tanks.forEach((t, i) => {
      const makeUp = t.makeUp === null ? null : this.#streams.flow(t.makeUp);
      this.#tanks[i].events(this.#streams.flow(t.from), makeUp);
    });
    for (const b of batches) {
      writeBatch(this.#book, b, this.#laws(b.name, b.equilibrium));
      for (const phase of PHASES) this.fixedVolume[phase] += batchVolume(b, phase);
    }
    this.#showStreams();
    writeStreamFigures(this.#book, [...this.#net.streams.values()]);
  }

  #openTank(t: Tank, i: number): void {
    const { flow, dry } = this.#pumps[i];
    const tank = new TankWriter(
      this.#book,
      t,
      t.flow === null ? this.#streams.flow(t.to) : flow,
      dry,
      this.#levelMoves(i),
      this.#carries(t.from),
    );
    this.#tanks[i] = tank;
    if (tank.volume) this.levels.push({ phase: t.phase, place: tank.volume });
    else this.fixedVolume[t.phase] += t.held;
    if (tank.bottomsVolume) this.levels.push({ phase: otherPhase(t.phase), place: tank.bottomsVolume });
    if (tank.lost) this.totals.push(tank.lost);
    if (tank.removed) this.totals.push(tank.removed);
  }

  /**
   * With weirs the levels of a closed loop settle among themselves, so at steady state its tank holds what is left
   * of all that the loop held at the start; its own balance says nothing then.
   */
  keepLoops(): void {
    this.#s.tanks.forEach((t, index) => {
      const { volume } = this.#tanks[index];
      if (volume === null || !this.#isSetBy(t.from, index)) return;
      const members = this.#loopTrains(t).flatMap((i) =>
        this.#trains[i].vessels.flatMap(({ places: { volumes } }) =>
          volumes.layer === null
            ? []
            : [volumes.mixer[t.phase], volumes.band?.[t.phase] ?? null, volumes.layer[t.phase]].flatMap(
                (r) => (r ? [r.index] : []),
              ),
        ),
      );
      if (members.length > 0)
        this.#book.ledger.steady[volume.index] = { keepsSumOf: [volume.index, ...members] };
    });
  }

  /** Trains that a tank's stream passes before it comes back: those upstream of what flows in. */
  #loopTrains(t: Tank): number[] {
    const trains = [...this.#streams.upstream(t.from)].flatMap((name) => {
      const { maker } = this.#net.streams.get(name) as Stream;
      return maker.kind === 'train' || maker.kind === 'draw' ? [maker.index] : [];
    });
    return [...new Set(trains)];
  }

  /** A pump's flow: as set, while it is in service and its tank is not empty, and nothing on its way is stopped. */
  #pump(index: number): { flow: Ref; dry: Ref | null } {
    const t = this.#s.tanks[index];
    const set = this.#book.input(
      { path: `${t.name}.flow`, unit: 'm^3/s', scale: t.flow as number },
      t.flow as number,
    );
    const mode = (path: string): Ref => this.#book.input({ path, unit: '', scale: 1 }, 1);
    const trip = this.#moving.has(`${t.name}.pump`) ? mode(`${t.name}.pump`) : null;
    const dry = this.#levelMoves(index) ? mode(`${t.name}.not empty`) : null;
    let flow = set;
    for (const on of [trip, dry]) if (on) flow = this.#book.signal(product, flow, on);
    return { flow: this.#gated(flow, { kind: 'tank', index }), dry };
  }

  /** Feeds and pumps that set what enters a train of a phase, side feeds included. */
  #originsOf(t: Train, phase: Phase): readonly Origin[] {
    const index = this.#s.trains.indexOf(t);
    const sides = t.stages.flatMap((_, j) => this.#net.sides(index, j, phase));
    return [t[phase].from, ...sides].flatMap((q) => this.#net.origins(q));
  }

  /** Trains that a feed or pump sends something into. */
  #fedBy(from: Origin): Train[] {
    return this.#s.trains.filter((t) =>
      PHASES.some((phase) => this.#originsOf(t, phase).some((m) => isSame(m, from))),
    );
  }

  /** An agitator that also pumps holds back, when it stops, what is on its way into its train. */
  #gated(flow: Ref, from: Origin): Ref {
    let result = flow;
    for (const path of this.#gates(from))
      result = this.#book.signal(product, result, this.#book.running(path));
    return result;
  }

  /** Stages with pumping agitators that somebody stops, downstream of a feed or pump. */
  #gates(from: Origin): string[] {
    return this.#fedBy(from).flatMap((t) =>
      t.stages.flatMap((q, j) => {
        const path = `${t.name}.${j + 1}`;
        return q.mixer.pumps && this.#moving.has(`${path}.mixer`) ? [path] : [];
      }),
    );
  }

  /** Whether something on the way back to a stream's pump or feed makes its flow differ from what that sets. */
  #disturbed(stream: string): boolean {
    return [...this.#streams.upstream(stream)].some((name) => {
      const { maker } = this.#net.streams.get(name) as Stream;
      if (maker.kind !== 'train' && maker.kind !== 'draw') return false;
      const t = this.#s.trains[maker.index];
      const carries = t.stages.some((q) => q.settler.carry !== null || q.settler.band !== null);
      return t.hydraulics === 'weirs' || carries;
    });
  }

  #levelMoves(index: number): boolean {
    const t = this.#s.tanks[index];
    if (t.flow === null) return false;
    return !this.#isSetBy(t.from, index) || t.makeUp !== null || this.#disturbed(t.from);
  }

  /** Whether a stream can bring something of the other phase. */
  #carries(stream: string): boolean {
    const { maker, phase } = this.#net.streams.get(stream) as Stream;
    switch (maker.kind) {
      case 'feed':
        return false;
      case 'tank':
        return this.#s.tanks[maker.index].passes > 0 && this.#carries(this.#s.tanks[maker.index].from);
      case 'split':
      case 'blend':
        return this.#net.behind(stream).some((q) => this.#carries(q));
      default: {
        const t = this.#s.trains[maker.index];
        const from = maker.kind === 'draw' ? [maker.stage] : ends(route(t, phase));
        return (
          t.hydraulics === 'weirs' ||
          from.some((j) => t.stages[j].settler.carry !== null || t.stages[j].settler.band !== null)
        );
      }
    }
  }

  /** A flow moves if somebody changes it, if its pump or an agitator can stop, or if its tank can run dry. */
  #originMoves(m: Origin): boolean {
    const name = m.kind === 'feed' ? this.#s.feeds[m.index].name : this.#s.tanks[m.index].name;
    return (
      this.#gates(m).length > 0 ||
      this.#moving.has(`${name}.flow`) ||
      this.#moving.has(`${name}.pump`) ||
      (m.kind === 'tank' && this.#levelMoves(m.index))
    );
  }

  /** Whether anything can change the flows of a train in a run. */
  #trainMoves(t: Train): boolean {
    const index = this.#s.trains.indexOf(t);
    return PHASES.some((phase) => {
      const sides = t.stages.flatMap((_, j) => this.#net.sides(index, j, phase));
      return (
        [t[phase].to, t[phase].from, ...sides].some((q) => this.#streams.sharesMove(q)) ||
        [t[phase].from, ...sides].some((q) => this.#disturbed(q)) ||
        this.#originsOf(t, phase).some((m) => this.#originMoves(m)) ||
        t.stages.some((_, j) => this.#moving.has(`${t.name}.${j + 1}.${phase} bypass`))
      );
    });
  }

  #laws(name: string, equilibrium: Train['equilibrium']): Laws {
    const chem = chemistry(this.#s, equilibrium);
    return {
      chemistry: chem,
      numbers: chem.numbers.map((q) =>
        this.#book.ledger.parameter(`${name}.${this.#book.name(q.solute)}.${q.name}`, q.unit, q.value),
      ),
    };
  }

  #openTrain(t: Train, i: number, start: Entering): TrainWriter {
    const design = this.designs[i];
    // How many trains the flow of a pump or feed passes: each may lose its part of it.
    const part = forBoth(
      (phase) => 1 / Math.max(1, ...this.#originsOf(t, phase).map((m) => this.#fedBy(m).length)),
    );
    const writer = new TrainWriter(this.#book, t, {
      index: i,
      design,
      nominal: (j) => ({
        ...forBoth((phase) => this.#book.total(this.#streams.set.stage(i, phase, j).enters)),
        total: this.#book.number(design.stages[j].set.aqueous + design.stages[j].set.organic),
        part,
      }),
      laws: this.#laws(t.name, t.equilibrium),
      start: start.initial(t),
      moves: this.#trainMoves(t),
      moving: this.#moving,
      streams: () => this.#streams,
    });
    for (const [j, v] of writer.vessels.entries()) {
      const { volumes } = v.places;
      for (const phase of PHASES) {
        const held = [volumes.mixer[phase], volumes.band?.[phase], volumes.layer?.[phase]];
        if (t.hydraulics === 'weirs') for (const place of held) if (place) this.levels.push({ phase, place });
        const d = design.stages[j];
        if (t.hydraulics === 'full')
          this.fixedVolume[phase] += d.mixer[phase] + d.band[phase] + d.layer[phase];
      }
    }
    return writer;
  }

  #outlet(out: Stream): Sink {
    const left = (phase: Phase): Sink['aqueous'] => {
      if (phase !== out.phase && !this.#carries(out.name)) return [];
      const t = totals(this.#book, out.name, phase, 'out', phase !== out.phase);
      this.totals.push(t);
      return [{ share: null, places: t.components, volume: t.volume }];
    };
    return forBoth(left);
  }

  #source(m: Origin): Source {
    return m.kind === 'feed' ? this.#feeds[m.index].source() : this.#tanks[m.index].source();
  }

  /** Flow and composition of every stream, under its own name; a tank's stream repeats what the tank shows. */
  #showStreams(): void {
    const set = setFlows(this.#s, this.#net);
    for (const { name, phase } of this.#net.streams.values()) {
      const { flow, carried } = this.#streams.flows.stream(name);
      const scale = set.stream(name).flow || 1e-6;
      this.#book.ledger.output({ path: `${name}.flow`, unit: 'm^3/s', scale }, same, this.#book.total(flow));
      if (!isNothing(carried))
        this.#book.showValue(
          `${name}.carried ${otherPhase(phase)}`,
          'm^3/s',
          scale * 1e-4,
          this.#book.total(carried),
        );
      for (let k = 0; k < this.#book.components(phase); k++)
        this.#book.show(name, k, this.#streams.content(name, k));
    }
  }
}

const isSame = (a: Origin, b: Origin): boolean => a.kind === b.kind && a.index === b.index;
