import type { Network, Origin, Stream } from '../scenario/network.ts';
import type { Branch, Phase, Scenario } from '../scenario/scenario.ts';
import type { Algebra } from './algebra.ts';
import { forBoth, type Of, otherPhase } from './flow.ts';
import { ends, route } from './route.ts';

/** What stands for a flow, and for what feeds and pumps set and branches take. */
export interface FlowAlgebra<T> extends Algebra<T> {
  origin(m: Origin): T;
  /** What a branch or draw takes of a stream; of nothing it takes nothing. */
  take(b: Branch, whole: T): T;
  /** What is left of a stream. `takes` is what the branches take, one by one. */
  rest(whole: T, takes: readonly T[], branches: readonly Branch[]): T;
}

/** What stages do to the flows; without it they pass on what enters. */
export interface Stages<T> {
  /** What leaves a stage with the stream of the other phase. */
  carried(train: number, j: number): Of<T>;
  /** Weirs: what leaves a stage whatever enters. Null in full vessels. */
  outlets(train: number, j: number): Of<T> | null;
  /** Of what arrives at a stage with a phase, the part that is led past it. */
  past(train: number, phase: Phase, j: number, arrives: () => T): T;
}

/** A stream on its way: its main flow, and what it carries of the other phase. */
export interface Flowing<T> {
  readonly flow: T;
  readonly carried: T;
}

/** The flows of one phase at one stage. */
export interface AtStage<T> {
  /** What arrives as main flow: from the neighbour, from outside, from the side. */
  readonly enters: T;
  /** What comes into the mixer with the other phase. */
  readonly carriedIn: T;
  /** What leaves, all draws included. */
  readonly leaves: Flowing<T>;
  /** What is left of that for the next stage. */
  readonly onward: Flowing<T>;
}

/** What a phase's stream carries of the other one at a stage: out of it, on to the next, and into the mixer. */
interface Carried<T> {
  readonly leaves: T;
  readonly onward: T;
  into(): T;
}

/**
 * The flows of a plant: m³/s of carrier, in full vessels what enters less what is carried out with the other phase, with
 * weirs what the weirs let pass. Written once for whatever stands for a flow (`Algebra`).
 */
export class Flows<T> {
  readonly #s: Scenario;
  readonly #net: Network;
  readonly #a: FlowAlgebra<T>;
  readonly #stages: Stages<T>;
  readonly #streams = new Map<string, Flowing<T>>();
  readonly #carriedOn = new Map<string, readonly Carried<T>[]>();
  readonly #passes = new Map<string, readonly AtStage<T>[]>();

  constructor(s: Scenario, net: Network, algebra: FlowAlgebra<T>, stages: Partial<Stages<T>> = {}) {
    this.#s = s;
    this.#net = net;
    this.#a = algebra;
    this.#stages = {
      carried: () => forBoth(() => algebra.none),
      outlets: () => null,
      past: () => algebra.none,
      ...stages,
    };
  }

  stream(name: string): Flowing<T> {
    const found = this.#streams.get(name);
    if (found !== undefined) return found;
    const made: Flowing<T> = {
      flow: this.#flow(this.#net.streams.get(name) as Stream),
      carried: this.#carried(name),
    };
    this.#streams.set(name, made);
    return made;
  }

  stage(train: number, phase: Phase, j: number): AtStage<T> {
    return this.#train(train, phase)[j];
  }

  /** What a branch or a draw is taken of. */
  whole(name: string): T {
    const { maker, phase } = this.#net.streams.get(name) as Stream;
    if (maker.kind === 'split') return this.stream(this.#s.splits[maker.index].stream).flow;
    if (maker.kind === 'draw') return this.stage(maker.index, phase, maker.stage).leaves.flow;
    return this.#a.none;
  }

  #flow({ name, phase, maker }: Stream): T {
    const a = this.#a;
    const flowOf = (q: string): T => this.stream(q).flow;
    switch (maker.kind) {
      case 'feed':
        return a.origin({ kind: 'feed', index: maker.index });
      case 'tank':
        return this.#s.tanks[maker.index].flow === null
          ? this.#sum(this.#net.behind(name).map(flowOf))
          : a.origin({ kind: 'tank', index: maker.index });
      case 'blend':
        return this.#sum(this.#s.blends[maker.index].of.map(flowOf));
      case 'split':
        return this.#branch(name, maker.index, flowOf(this.#s.splits[maker.index].stream));
      case 'draw':
        return a.take(
          this.#draw(name, maker.index, maker.stage),
          this.stage(maker.index, phase, maker.stage).leaves.flow,
        );
      case 'train': {
        const r = route(this.#s.trains[maker.index], phase);
        return this.#sum(ends(r).map((j) => this.stage(maker.index, phase, j).onward.flow));
      }
    }
  }

  /** It follows from the vessels that a stream leaves, never from its own flow. */
  #carried(name: string): T {
    const a = this.#a;
    const { maker, phase } = this.#net.streams.get(name) as Stream;
    switch (maker.kind) {
      case 'feed':
        return a.none;
      case 'tank': {
        const { passes, from } = this.#s.tanks[maker.index];
        return passes > 0 ? a.scale(this.#carried(from), passes) : a.none;
      }
      case 'blend':
        return this.#sum(this.#s.blends[maker.index].of.map((q) => this.#carried(q)));
      case 'split':
        return this.#branch(name, maker.index, this.#carried(this.#s.splits[maker.index].stream));
      case 'draw':
        return a.take(
          this.#draw(name, maker.index, maker.stage),
          this.#carriedAlong(maker.index, phase)[maker.stage].leaves,
        );
      case 'train': {
        const along = this.#carriedAlong(maker.index, phase);
        return this.#sum(ends(route(this.#s.trains[maker.index], phase)).map((j) => along[j].onward));
      }
    }
  }

  #sum(list: readonly T[]): T {
    return list.length === 1 ? list[0] : this.#a.add(...list);
  }

  #branch(name: string, split: number, whole: T): T {
    const { branches } = this.#s.splits[split];
    const own = branches.find((b) => b.name === name);
    return own ? this.#a.take(own, whole) : this.#left(whole, branches);
  }

  #left(whole: T, branches: readonly Branch[]): T {
    if (branches.length === 0) return whole;
    return this.#a.rest(
      whole,
      branches.map((b) => this.#a.take(b, whole)),
      branches,
    );
  }

  #draw(name: string, train: number, stage: number): Branch {
    return this.#s.trains[train].stages[stage].draws.find((d) => d.name === name) as Branch;
  }

  #draws(train: number, phase: Phase, stage: number): readonly Branch[] {
    return this.#s.trains[train].stages[stage].draws.filter((d) => d.phase === phase);
  }

  /**
   * What the stream of a phase carries of the other one, stage by stage. It follows from the stage alone, unless the
   * stream can be led past it: only then is it asked what arrives, or a closed loop would never end.
   */
  #carriedAlong(train: number, phase: Phase): readonly Carried<T>[] {
    const key = `${train} ${phase}`;
    const found = this.#carriedOn.get(key);
    if (found) return found;
    const t = this.#s.trains[train];
    const r = route(t, phase);
    const other = otherPhase(phase);
    const made: Carried<T>[] = [];
    for (const j of r.order) {
      const arrives = (): T => {
        const before = r.before(j);
        const main =
          before === null ? this.#share(this.#carried(t[phase].from), r.enters[j]) : made[before].onward;
        return this.#withSides(main, train, phase, j, (q) => this.#carried(q));
      };
      const past = this.#stages.past(train, phase, j, arrives);
      const leaves = this.#a.add(this.#stages.carried(train, j)[other], past);
      const onward = this.#left(leaves, this.#draws(train, phase, j));
      made[j] = { leaves, onward, into: () => this.#a.sub(arrives(), past) };
    }
    this.#carriedOn.set(key, made);
    return made;
  }

  #share(inlet: T, share: number): T {
    return share === 1 ? inlet : share === 0 ? this.#a.none : this.#a.scale(inlet, share);
  }

  #withSides(main: T, train: number, phase: Phase, j: number, of: (stream: string) => T): T {
    const sides = this.#net.sides(train, j, phase).map(of);
    return sides.length === 0 ? main : this.#a.add(main, ...sides);
  }

  #train(train: number, phase: Phase): readonly AtStage<T>[] {
    const key = `${train} ${phase}`;
    const found = this.#passes.get(key);
    if (found) return found;
    const a = this.#a;
    const t = this.#s.trains[train];
    const r = route(t, phase);
    const inlet = this.stream(t[phase].from).flow;
    const along = this.#carriedAlong(train, phase);
    const withOther = this.#carriedAlong(train, otherPhase(phase));
    // What a draw takes can depend on the very flow that it is taken of: a stage is there before its draws are asked for.
    const made: AtStage<T>[] = [];
    this.#passes.set(key, made);
    for (const j of r.order) {
      const before = r.before(j);
      const main = before === null ? this.#share(inlet, r.enters[j]) : made[before].onward.flow;
      const enters = this.#withSides(main, train, phase, j, (q) => this.stream(q).flow);
      const carriedIn = withOther[j].into();
      const outlets = this.#stages.outlets(train, j);
      const flow = outlets
        ? a.add(
            outlets[phase],
            this.#stages.past(train, phase, j, () => enters),
          )
        : a.sub(a.add(enters, carriedIn), this.#stages.carried(train, j)[phase]);
      const leaves = { flow, carried: along[j].leaves };
      made[j] = { enters, carriedIn, leaves, onward: leaves };
      const onward = { flow: this.#left(flow, this.#draws(train, phase, j)), carried: along[j].onward };
      made[j] = { enters, carriedIn, leaves, onward };
    }
    return made;
  }
}
