import { type Execution, generated } from '../math/kernel.ts';
import { type Maker, type Network, network, type Stream } from '../scenario/network.ts';
import type { Phase, Scenario, Tank, Train } from '../scenario/scenario.ts';
import type { F, System } from '../solve/system.ts';
import { type Account, accounts } from './accounts.ts';
import { Book, type Source } from './book.ts';
import { type Totals, totals, writeFeed } from './boundary.ts';
import { chemistry } from './chemistry.ts';
import { holdWhatOnlyCirculates } from './circulating.ts';
import { entering } from './entering.ts';
import { passed, same } from './kernels.ts';
import type { Ref } from './ledger.ts';
import { type Flows, type Laws, type WrittenStage, writeStage } from './stage.ts';
import { suitable } from './suitable.ts';
import { type WrittenTank, writeTank, writeTankEvents } from './tank.ts';

/** A plant ready to be solved: the System, its numbers at the start, and what is needed to read the answer. */
export interface Plant {
  readonly scenario: Scenario;
  readonly network: Network;
  readonly system: System;
  readonly parameters: F;
  /** Inputs before anything changes. */
  readonly inputs: F;
  /** The barren start: full vessels at their steady hold-ups, nothing extracted yet. */
  readonly barren: F;
  readonly accounts: readonly Account[];
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
  suitable(s, net);
  const book = new Book(s, net);
  const moving = options.moving ?? new Set(s.upsets.map((u) => u.quantity));
  const writer = new PlantWriter(s, net, book, moving);
  writer.write();
  const books = accounts(book, writer.totals, writer.levels, writer.fixedVolume);
  holdWhatOnlyCirculates(book.ledger, books);
  return {
    scenario: s,
    network: net,
    system: book.ledger.build(options.execution ?? generated),
    parameters: Float64Array.from(book.ledger.parameterValues),
    inputs: Float64Array.from(book.inputValues),
    barren: Float64Array.from(book.initial),
    accounts: books,
  };
}

class PlantWriter {
  readonly totals: Totals[] = [];
  readonly levels: { phase: Phase; place: Ref }[] = [];
  /** m³ of each phase in vessels whose total never changes. */
  readonly fixedVolume = { aqueous: 0, organic: 0 };
  readonly #s: Scenario;
  readonly #net: Network;
  readonly #book: Book;
  readonly #moving: ReadonlySet<string>;
  readonly #feeds: Source[] = [];
  readonly #tanks: WrittenTank[] = [];
  readonly #trains: WrittenStage[][] = [];
  readonly #outlets = new Map<string, Totals>();

  constructor(s: Scenario, net: Network, book: Book, moving: ReadonlySet<string>) {
    this.#s = s;
    this.#net = net;
    this.#book = book;
    this.#moving = moving;
  }

  write(): void {
    const { feeds, tanks, trains } = this.#s;
    for (const f of feeds) {
      const { source, totals: entered } = writeFeed(this.#book, f);
      this.#feeds.push(source);
      this.totals.push(entered);
    }
    // A tank without a pump passes on what it gets, so it is written after the source of its flow.
    const order = tanks
      .map((_, i) => i)
      .sort((a, b) => Number(tanks[a].flow === null) - Number(tanks[b].flow === null));
    for (const i of order) this.#tanks[i] = this.#writeTank(tanks[i]);
    trains.forEach((t, i) => {
      this.#trains[i] = this.#writeStages(t);
    });
    for (const out of this.#net.outlets) {
      const left = totals(this.#book, out.name, out.phase, 'out');
      this.#outlets.set(out.name, left);
      this.totals.push(left);
    }
    for (const stream of this.#net.streams.values()) this.#source(stream).send(this.#sink(stream));
    for (const stages of this.#trains) this.#joinStages(stages);
    this.#writeVolumes();
    this.#showStreams();
  }

  #writeTank(t: Tank): WrittenTank {
    const source = this.#net.flowSource(t.from);
    const own = this.#net.flowSource(t.to);
    const levelMoves = t.flow !== null && !(source.kind === own.kind && source.index === own.index);
    const w = writeTank(
      this.#book,
      t,
      levelMoves || t.flow !== null ? null : this.#flow(source),
      levelMoves,
      t.content,
    );
    if (w.volume === null) this.fixedVolume[t.phase] += t.held;
    else this.levels.push({ phase: t.phase, place: w.volume });
    if (w.lost) this.totals.push(w.lost);
    return w;
  }

  #flow(m: Maker): Ref {
    return m.kind === 'feed' ? this.#feeds[m.index].flow : this.#tanks[m.index].source.flow;
  }

  #designFlow(m: Maker): number {
    return m.kind === 'feed' ? this.#s.feeds[m.index].flow : (this.#s.tanks[m.index].flow as number);
  }

  /** A flow moves if somebody changes it, or if the tank it comes from can run dry. */
  #flowMoves(m: Maker): boolean {
    const name = m.kind === 'feed' ? this.#s.feeds[m.index].name : this.#s.tanks[m.index].name;
    return this.#moving.has(`${name}.flow`) || (m.kind === 'tank' && this.#tanks[m.index].volume !== null);
  }

  #writeStages(t: Train): WrittenStage[] {
    const source = {
      aqueous: this.#net.flowSource(t.aqueous.from),
      organic: this.#net.flowSource(t.organic.from),
    };
    const flows: Flows = {
      aqueous: this.#flow(source.aqueous),
      organic: this.#flow(source.organic),
      design: { aqueous: this.#designFlow(source.aqueous), organic: this.#designFlow(source.organic) },
      move: this.#flowMoves(source.aqueous) || this.#flowMoves(source.organic),
    };
    const chem = chemistry(this.#s, t);
    const laws: Laws = {
      chemistry: chem,
      numbers: chem.numbers.map((q) =>
        this.#book.ledger.parameter(`${t.name}.${this.#book.name(q.solute)}.${q.name}`, q.unit, q.value),
      ),
    };
    const start = entering(this.#s, this.#net, t);
    for (const stage of t.stages) {
      const share = flows.design.organic / (flows.design.aqueous + flows.design.organic);
      this.fixedVolume.organic += stage.settler.organic + stage.mixer.volume * share;
      this.fixedVolume.aqueous += stage.settler.aqueous + stage.mixer.volume * (1 - share);
    }
    return t.stages.map((_, j) => writeStage(this.#book, t, j, laws, flows, start));
  }

  #joinStages(stages: readonly WrittenStage[]): void {
    for (let j = 0; j + 1 < stages.length; j++) {
      stages[j].outlet.aqueous.send(stages[j + 1].inlet.aqueous);
      stages[j + 1].outlet.organic.send(stages[j].inlet.organic);
    }
  }

  #source({ maker, phase }: Stream): Source {
    if (maker.kind === 'feed') return this.#feeds[maker.index];
    if (maker.kind === 'tank') return this.#tanks[maker.index].source;
    const stages = this.#trains[maker.index];
    return stages[phase === 'aqueous' ? stages.length - 1 : 0].outlet[phase];
  }

  #sink({ name, user, phase }: Stream): readonly Ref[] {
    if (user === null) return (this.#outlets.get(name) as Totals).components;
    if (user.kind === 'tank') return this.#tanks[user.index].inlet;
    const stages = this.#trains[user.index];
    return stages[phase === 'aqueous' ? 0 : stages.length - 1].inlet[phase];
  }

  /** Carrier volume runs from where a flow is set (feed, pump) straight to the next level or outlet. */
  #writeVolumes(): void {
    const { ledger } = this.#book;
    this.#s.feeds.forEach((f, i) => {
      ledger.flux(passed, [this.#feeds[i].flow], {
        from: this.totals[i].volume,
        to: this.#volumeEnd(f.name),
      });
    });
    this.#s.tanks.forEach((t, i) => {
      const w = this.#tanks[i];
      if (w.volume === null) return;
      ledger.flux(passed, [w.source.flow], { from: w.volume, to: this.#volumeEnd(t.to) });
      writeTankEvents(this.#book, t, w, this.#flow(this.#net.flowSource(t.from)));
    });
  }

  #volumeEnd(name: string): Ref {
    const { user, phase } = this.#net.streams.get(name) as Stream;
    if (user === null) return (this.#outlets.get(name) as Totals).volume;
    if (user.kind === 'train') return this.#volumeEnd(this.#s.trains[user.index][phase].to);
    return this.#tanks[user.index].volume ?? this.#volumeEnd(this.#s.tanks[user.index].to);
  }

  /** Flow and composition of every stream, under its own name; a tank's stream repeats what the tank shows. */
  #showStreams(): void {
    for (const stream of this.#net.streams.values()) {
      const source = this.#source(stream);
      const scale = this.#designFlow(this.#net.flowSource(stream.name));
      this.#book.ledger.output({ path: `${stream.name}.flow`, unit: 'm^3/s', scale }, same, source.flow);
      for (let k = 0; k < this.#book.components(stream.phase); k++)
        this.#book.show(stream.name, k, source.content(k));
    }
  }
}
