import type { Network, Origin, Stream } from '../scenario/network.ts';
import type { Branch, Phase, Scenario } from '../scenario/scenario.ts';
import type { Book, Content, Sink } from './book.ts';
import { type FlowAlgebra, Flows } from './flows.ts';
import { meanOf, past, shareOfFlow, whereLeft } from './kernels.ts';
import type { Ref } from './ledger.ts';
import { ends, route } from './route.ts';
import { isNothing, just, type Sum, sums } from './sum.ts';
import type { TrainWriter } from './train.ts';

/** The vessels between which streams run; each is there when it is asked for. */
export interface Vessels {
  readonly origin: (m: Origin) => Ref;
  readonly train: (index: number) => TrainWriter;
  /** Concentration of component k in what a feed or tank sends. */
  readonly content: (m: Origin, k: number) => Content;
  readonly tankSink: (index: number) => Sink;
  readonly outlet: (stream: string) => Sink;
}

/** Flows, compositions and destinations of the streams between the vessels. */
export class Streams {
  /** As feeds and pumps set them. */
  readonly set: Flows<Sum>;
  /** As they are. */
  readonly flows: Flows<Sum>;
  readonly #s: Scenario;
  readonly #net: Network;
  readonly #book: Book;
  readonly #v: Vessels;
  readonly #moving: ReadonlySet<string>;
  readonly #shares = new Map<string, Ref>();
  readonly #taken = new Map<string, Ref>();

  constructor(s: Scenario, net: Network, book: Book, moving: ReadonlySet<string>, v: Vessels) {
    this.#s = s;
    this.#net = net;
    this.#book = book;
    this.#v = v;
    this.#moving = moving;
    const algebra: FlowAlgebra<Sum> = {
      ...sums,
      origin: (m) => just(v.origin(m)),
      take: (b, whole) => (isNothing(whole) ? whole : book.portion(whole, this.share(b.name))),
      rest: (whole, takes) => sums.sub(whole, sums.add(...takes)),
    };
    this.set = new Flows(s, net, algebra);
    this.flows = new Flows(s, net, algebra, {
      carried: (i, j) => v.train(i).carriedOut(j),
      outlets: (i, j) => v.train(i).outlets(j),
      past: (i, phase, j, arrives) => {
        const bypass = v.train(i).bypass(phase, j);
        return bypass === null ? sums.none : book.portion(arrives(), bypass);
      },
    });
  }

  flow(name: string): Ref {
    return this.#book.total(this.flows.stream(name).flow);
  }

  /** Every stream from which the flow of one follows, itself included. */
  upstream(stream: string): ReadonlySet<string> {
    const passed = new Set([stream]);
    for (const name of passed) for (const q of this.#net.behind(name)) passed.add(q);
    return passed;
  }

  /** Whether somebody changes how a stream upstream of this one divides. */
  sharesMove(stream: string): boolean {
    return [...this.upstream(stream)].some((q) => {
      const { maker } = this.#net.streams.get(q) as Stream;
      const groups =
        maker.kind === 'split'
          ? [this.#s.splits[maker.index].branches]
          : maker.kind === 'train' || maker.kind === 'draw'
            ? this.#s.trains[maker.index].stages.map((t) => t.draws)
            : [];
      return groups.some((g) => g.some((b) => this.#moves(b)));
    });
  }

  #moves({ name }: Branch): boolean {
    return this.#moving.has(`${name}.share`) || this.#moving.has(`${name}.flow`);
  }

  /** All that divides one stream with this branch or draw. */
  #group(name: string): readonly Branch[] {
    const { maker, phase } = this.#net.streams.get(name) as Stream;
    if (maker.kind === 'split') return this.#s.splits[maker.index].branches;
    if (maker.kind !== 'draw') return [];
    return this.#s.trains[maker.index].stages[maker.stage].draws.filter((d) => d.phase === phase);
  }

  /** What a branch or draw takes of its stream, as a share of it: never more than those before it leave. */
  share(name: string): Ref {
    const found = this.#taken.get(name);
    if (found) return found;
    const branches = this.#group(name);
    // Shares that nobody changes have been checked; a flow alone is never more than all.
    const grow = branches.some((b) => this.#moves(b) || ('flow' in b.take && branches.length > 1));
    let left = this.#book.number(1);
    for (const b of branches) {
      const stated = this.#stated(b);
      const taken = grow ? this.#book.signal(whereLeft, stated, left) : stated;
      this.#taken.set(b.name, taken);
      left = this.#left([taken], left);
    }
    if (grow) this.#tellExhausted(branches, left);
    return this.#taken.get(name) as Ref;
  }

  /** What a stream divides into can take all of it: said, with the time. */
  #tellExhausted(branches: readonly Branch[], left: Ref): void {
    const names = branches.map((b) => b.name).join(', ');
    this.#book.ledger.guard(
      {
        name: `${names} take all`,
        direction: -1,
        message: `${names} ${branches.length > 1 ? 'take' : 'takes'} all there is of the stream: nothing is left for the rest; take less`,
        fromStart: true,
        action: 'report',
      },
      past,
      left,
      this.#book.number(1e-9),
    );
  }

  #left(taken: readonly Ref[], of = this.#book.number(1)): Ref {
    return taken.reduce((left, q) => this.#book.total(sums.sub(just(left), just(q))), of);
  }

  /** A flow is taken as its share of what feeds and pumps set: carry-over and weirs change both alike. */
  #stated({ name, take }: Branch): Ref {
    const found = this.#shares.get(name);
    if (found) return found;
    const book = this.#book;
    const made =
      'share' in take
        ? book.input({ path: `${name}.share`, unit: '', scale: 1 }, take.share)
        : book.signal(
            shareOfFlow,
            book.input({ path: `${name}.flow`, unit: 'm^3/s', scale: take.flow }, take.flow),
            book.total(this.set.whole(name)),
          );
    this.#shares.set(name, made);
    return made;
  }

  /** Where a stream goes that divides: to its branches, and the rest to where the others go. */
  divided(branches: readonly Branch[], onward: () => Sink): Sink {
    if (branches.length === 0) return onward();
    const book = this.#book;
    const shares = branches.map((b) => this.share(b.name));
    const parts = [
      ...branches.map((b, i) => book.portionOf(this.sink(b.name), shares[i])),
      book.portionOf(onward(), this.#left(shares)),
    ];
    return {
      aqueous: parts.flatMap((p) => p.aqueous),
      organic: parts.flatMap((p) => p.organic),
    };
  }

  sink(name: string): Sink {
    const { user, phase } = this.#net.streams.get(name) as Stream;
    switch (user?.kind) {
      case undefined:
        return this.#v.outlet(name);
      case 'tank':
        return this.#v.tankSink(user.index);
      case 'train':
        return this.#v.train(user.index).entry(phase);
      case 'stage':
        return this.#v.train(user.index).into(phase, user.stage);
      case 'blend':
        return this.sink(this.#s.blends[user.index].name);
      case 'split': {
        const { branches, rest: last } = this.#s.splits[user.index];
        return this.divided(branches, () => this.sink(last));
      }
    }
  }

  /** Concentration of component k in a stream, for those who look at it. */
  content(name: string, k: number): Content {
    const { maker, phase } = this.#net.streams.get(name) as Stream;
    switch (maker.kind) {
      case 'feed':
      case 'tank':
        return this.#v.content({ kind: maker.kind, index: maker.index }, k);
      case 'split':
        return this.content(this.#s.splits[maker.index].stream, k);
      case 'blend':
        return this.#mean(
          this.#s.blends[maker.index].of.map((q) => ({
            flow: this.flows.stream(q).flow,
            content: this.content(q, k),
          })),
        );
      case 'draw':
        return this.#v.train(maker.index).content(phase, maker.stage, k);
      case 'train':
        return this.#mean(
          ends(route(this.#s.trains[maker.index], phase)).map((j) => ({
            flow: this.flows.stage(maker.index, phase, j).onward.flow,
            content: this.#v.train(maker.index).content(phase, j, k),
          })),
        );
    }
  }

  /** Concentration of component k in what enters a stage of a train from outside it and from its neighbour. */
  entering(train: number, phase: Phase, j: number, k: number): Content {
    const t = this.#s.trains[train];
    const r = route(t, phase);
    const before = r.before(j);
    const main =
      before === null
        ? {
            flow: sums.scale(this.flows.stream(t[phase].from).flow, r.enters[j]),
            content: this.content(t[phase].from, k),
          }
        : {
            flow: this.flows.stage(train, phase, before).onward.flow,
            content: this.#v.train(train).content(phase, before, k),
          };
    const sides = this.#net.sides(train, j, phase).map((q) => ({
      flow: this.flows.stream(q).flow,
      content: this.content(q, k),
    }));
    return this.#mean([main, ...sides]);
  }

  #mean(list: readonly { flow: Sum; content: Content }[]): Content {
    if (list.length === 1) return list[0].content;
    const args = list.flatMap((q) => [
      this.#book.total(q.flow),
      this.#book.signal(q.content.kernel, ...q.content.args),
    ]);
    return { kernel: meanOf(list.length), args };
  }
}
