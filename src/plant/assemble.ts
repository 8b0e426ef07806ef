import { type Execution, generated } from '../math/kernel.ts';
import { type Maker, type Network, network, type Stream } from '../scenario/network.ts';
import type { Phase, Scenario, Tank, Train } from '../scenario/scenario.ts';
import type { F, System } from '../solve/system.ts';
import { type Account, accounts } from './accounts.ts';
import { Book, type Sink, type Source } from './book.ts';
import { FeedWriter, type Totals, totals } from './boundary.ts';
import { chemistry } from './chemistry.ts';
import { holdWhatOnlyCirculates } from './circulating.ts';
import { designs, type TrainDesign } from './design.ts';
import { entering } from './entering.ts';
import { forBoth, otherPhase, PHASES, type StreamFlow } from './flow.ts';
import { product, same } from './kernels.ts';
import type { Ref } from './ledger.ts';
import { suitable } from './suitable.ts';
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
  readonly execution?: Execution;
}

/**
 * Scenario → System.
 *
 * @throws Refusal where streams do not join up, or where the equations are not made for what they join.
 */
export function assemble(s: Scenario, options: AssembleOptions = {}): Plant {
  const net = network(s);
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
    system: book.ledger.build(options.execution ?? generated),
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
  }

  write(): void {
    const { feeds, tanks, trains } = this.#s;
    feeds.forEach((f, index) => {
      const writer = new FeedWriter(this.#book, f, (flow) => this.#gated(flow, { kind: 'feed', index }));
      this.#feeds.push(writer);
      this.totals.push(writer.totals);
    });
    tanks.forEach((t, index) => {
      this.#pumps[index] = t.flow === null ? { flow: this.#book.number(0), dry: null } : this.#pump(index);
    });
    trains.forEach((t, i) => {
      this.#trains[i] = this.#openTrain(t, i);
    });
    tanks.forEach((t, i) => {
      const flow = t.flow === null ? this.#streamFlow(t.from).flow : this.#pumps[i].flow;
      const tank = new TankWriter(
        this.#book,
        t,
        flow,
        this.#pumps[i].dry,
        this.#levelMoves(i),
        this.#carries(t.from),
      );
      this.#tanks[i] = tank;
      if (tank.volume) this.levels.push({ phase: t.phase, place: tank.volume });
      else this.fixedVolume[t.phase] += t.held;
      if (tank.bottomsVolume) this.levels.push({ phase: otherPhase(t.phase), place: tank.bottomsVolume });
      if (tank.lost) this.totals.push(tank.lost);
    });
    for (const out of this.#net.outlets) this.#outlets.set(out.name, this.#outlet(out));
    for (const t of this.#trains) t.run();
    trains.forEach((t, i) => {
      this.#trains[i].join(forBoth((phase) => () => this.#sink(t[phase].to)));
    });
    for (const stream of this.#net.streams.values())
      if (stream.maker.kind !== 'train') this.#source(stream).send(this.#sink(stream.name));
    tanks.forEach((t, i) => {
      this.#tanks[i].events(
        this.#streamFlow(t.from),
        t.makeUp === null ? null : this.#streamFlow(t.makeUp).flow,
      );
    });
    this.#showStreams();
  }

  /**
   * With weirs the levels of a closed loop settle among themselves, so at steady state its tank holds what is left
   * of all that the loop held at the start; its own balance says nothing then.
   */
  keepLoops(): void {
    this.#s.tanks.forEach((t, index) => {
      const { volume } = this.#tanks[index];
      if (volume === null || !isSame(this.#net.flowSource(t.from), { kind: 'tank', index })) return;
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

  /** Trains that a tank's stream passes before it comes back. */
  #loopTrains(t: Tank): number[] {
    const found: number[] = [];
    let { user } = this.#net.streams.get(t.to) as Stream;
    while (user?.kind === 'train' && !found.includes(user.index)) {
      found.push(user.index);
      user = (this.#net.streams.get(this.#s.trains[user.index][t.phase].to) as Stream).user;
    }
    return found;
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

  /** An agitator that also pumps holds back, when it stops, what is on its way into its train. */
  #gated(flow: Ref, from: Maker): Ref {
    let result = flow;
    for (const t of this.#s.trains) {
      const enters = PHASES.some((phase) => isSame(this.#net.flowSource(t[phase].from), from));
      if (!enters) continue;
      t.stages.forEach((q, j) => {
        const path = `${t.name}.${j + 1}`;
        if (q.mixer.pumps && this.#moving.has(`${path}.mixer`))
          result = this.#book.signal(product, result, this.#book.running(path));
      });
    }
    return result;
  }

  /** Whether something on the way back to a stream's pump or feed makes its flow differ from what that sets. */
  #disturbed(stream: string): boolean {
    const { maker, phase } = this.#net.streams.get(stream) as Stream;
    if (maker.kind === 'feed') return false;
    if (maker.kind === 'tank')
      return this.#s.tanks[maker.index].flow === null && this.#disturbed(this.#s.tanks[maker.index].from);
    const t = this.#s.trains[maker.index];
    const carries = t.stages.some((q) => q.settler.carry !== null || q.settler.band !== null);
    return t.hydraulics === 'weirs' || carries || this.#disturbed(t[phase].from);
  }

  #levelMoves(index: number): boolean {
    const t = this.#s.tanks[index];
    if (t.flow === null) return false;
    return (
      !isSame(this.#net.flowSource(t.from), { kind: 'tank', index }) ||
      t.makeUp !== null ||
      this.#disturbed(t.from)
    );
  }

  /** Whether a stream can bring something of the other phase. */
  #carries(stream: string): boolean {
    const { maker, phase } = this.#net.streams.get(stream) as Stream;
    if (maker.kind === 'feed') return false;
    if (maker.kind === 'tank')
      return this.#s.tanks[maker.index].passes > 0 && this.#carries(this.#s.tanks[maker.index].from);
    const { stages, hydraulics } = this.#s.trains[maker.index];
    const { settler } = stages[phase === 'aqueous' ? stages.length - 1 : 0];
    return hydraulics === 'weirs' || settler.carry !== null || settler.band !== null;
  }

  #streamFlow(name: string): StreamFlow {
    const { maker, phase } = this.#net.streams.get(name) as Stream;
    if (maker.kind === 'feed') return { flow: this.#feeds[maker.index].flow, carried: null };
    if (maker.kind === 'train') return this.#trains[maker.index].outlet(phase);
    const t = this.#s.tanks[maker.index];
    const flow = t.flow === null ? this.#streamFlow(t.from).flow : this.#pumps[maker.index].flow;
    return { flow, carried: this.#carriedWith(name) };
  }

  /** What a stream carries of the other phase. It follows from the vessel it leaves alone, never from its own flow. */
  #carriedWith(name: string): Ref | null {
    const { maker, phase } = this.#net.streams.get(name) as Stream;
    if (maker.kind === 'feed') return null;
    if (maker.kind === 'train') return this.#trains[maker.index].carried(phase);
    const t = this.#s.tanks[maker.index];
    const arrives = t.passes > 0 && this.#carries(t.from) ? this.#carriedWith(t.from) : null;
    return arrives === null ? null : this.#book.signal(product, arrives, this.#book.number(t.passes));
  }

  #origin(m: Maker): Ref {
    return m.kind === 'feed' ? this.#feeds[m.index].flow : this.#pumps[m.index].flow;
  }

  /** A flow moves if somebody changes it, if its pump or an agitator can stop, or if its tank can run dry. */
  #flowMoves(m: Maker): boolean {
    const name = m.kind === 'feed' ? this.#s.feeds[m.index].name : this.#s.tanks[m.index].name;
    const gated = this.#s.trains.some(
      (t) =>
        PHASES.some((phase) => isSame(this.#net.flowSource(t[phase].from), m)) &&
        t.stages.some((q, j) => q.mixer.pumps && this.#moving.has(`${t.name}.${j + 1}.mixer`)),
    );
    return (
      gated ||
      this.#moving.has(`${name}.flow`) ||
      this.#moving.has(`${name}.pump`) ||
      (m.kind === 'tank' && this.#levelMoves(m.index))
    );
  }

  /** How many trains the flow of a pump or feed passes. */
  #sharing(source: Maker, phase: Phase): number {
    return this.#s.trains.filter((t) => isSame(this.#net.flowSource(t[phase].from), source)).length;
  }

  #openTrain(t: Train, i: number): TrainWriter {
    const source = forBoth((phase) => this.#net.flowSource(t[phase].from));
    const chem = chemistry(this.#s, t);
    const laws: Laws = {
      chemistry: chem,
      numbers: chem.numbers.map((q) =>
        this.#book.ledger.parameter(`${t.name}.${this.#book.name(q.solute)}.${q.name}`, q.unit, q.value),
      ),
    };
    const design = this.designs[i];
    const nominal = forBoth((phase) => this.#origin(source[phase]));
    const total = this.#book.number(design.nominal.aqueous + design.nominal.organic);
    const bypassed = t.stages.some((_, j) =>
      PHASES.some((phase) => this.#moving.has(`${t.name}.${j + 1}.${phase} bypass`)),
    );
    const writer = new TrainWriter(this.#book, t, {
      design,
      nominal: { ...nominal, total, part: forBoth((phase) => 1 / this.#sharing(source[phase], phase)) },
      laws,
      start: entering(this.#s, this.#net, t),
      moves:
        bypassed || PHASES.some((phase) => this.#flowMoves(source[phase]) || this.#disturbed(t[phase].from)),
      moving: this.#moving,
      inlet: (phase) => this.#streamFlow(t[phase].from),
      inletContent: (phase, k) => this.#source(this.#net.streams.get(t[phase].from) as Stream).content(k),
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

  #source({ maker, phase }: Stream): Source {
    if (maker.kind === 'feed') return this.#feeds[maker.index].source();
    if (maker.kind === 'tank') return this.#tanks[maker.index].source();
    const train = this.#trains[maker.index];
    return train.source(phase, phase === 'aqueous' ? train.vessels.length - 1 : 0);
  }

  #sink(name: string): Sink {
    const { user, phase } = this.#net.streams.get(name) as Stream;
    if (user === null) return this.#outlets.get(name) as Sink;
    if (user.kind === 'tank')
      return this.#tanks[user.index].sink(() => this.#sink(this.#s.tanks[user.index].to));
    const train = this.#trains[user.index];
    return train.sink(phase, train.first(phase), () => this.#sink(this.#s.trains[user.index][phase].to));
  }

  /** Flow and composition of every stream, under its own name; a tank's stream repeats what the tank shows. */
  #showStreams(): void {
    for (const stream of this.#net.streams.values()) {
      const source = this.#source(stream);
      const from = this.#net.flowSource(stream.name);
      const scale =
        from.kind === 'feed' ? this.#s.feeds[from.index].flow : (this.#s.tanks[from.index].flow as number);
      const { flow, carried } = stream.maker.kind === 'train' ? this.#streamFlow(stream.name) : source;
      this.#book.ledger.output({ path: `${stream.name}.flow`, unit: 'm^3/s', scale }, same, flow);
      if (carried)
        this.#book.showValue(
          `${stream.name}.carried ${otherPhase(stream.phase)}`,
          'm^3/s',
          scale * 1e-4,
          carried,
        );
      for (let k = 0; k < this.#book.components(stream.phase); k++)
        this.#book.show(stream.name, k, source.content(k));
    }
  }
}

const isSame = (a: Maker, b: Maker): boolean => a.kind === b.kind && a.index === b.index;
