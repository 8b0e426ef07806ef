import { numbers } from '../plant/algebra.ts';
import type { Plant } from '../plant/assemble.ts';
import { Flows } from '../plant/flows.ts';
import { route } from '../plant/route.ts';
import type { Phase } from '../scenario/scenario.ts';

type Read = (path: string) => number;

/** Flows and compositions of what enters the stages at the moment of a row of outputs. */
export class StageInlets {
  readonly flows: Flows<number>;
  readonly #plant: Plant;
  readonly #read: Read;

  constructor(plant: Plant, read: Read) {
    const { scenario: s, network } = plant;
    this.#plant = plant;
    this.#read = read;
    this.flows = new Flows(s, network, {
      ...numbers,
      origin: (m) => read(`${m.kind === 'feed' ? s.feeds[m.index].name : s.tanks[m.index].to}.flow`),
      take: (b, whole) => Math.min(whole, read(`${b.name}.flow`)),
      rest: (whole, takes) => whole - numbers.add(...takes),
    });
  }

  /** Concentration in all of a phase that enters a mixer: from neighbours, from outside, from the side; kg/m³. */
  content(train: number, phase: Phase, j: number, component: string): number {
    const t = this.#plant.scenario.trains[train];
    const r = route(t, phase);
    const leaving = (k: number): number => this.#read(`${t.name}.${k + 1}.settler.${phase}.${component}`);
    const onward = (k: number): number => this.flows.stage(train, phase, k).onward.flow;
    const stream = (name: string): number => this.#read(`${name}.${component}`);
    const [before, after] = [r.before(j), r.after(j)];
    const beta = t.backFlow[phase];
    const parts =
      before === null
        ? [[this.flows.stream(t[phase].from).flow * r.enters[j], stream(t[phase].from)]]
        : [[(1 + beta) * onward(before), leaving(before)]];
    for (const name of this.#plant.network.sides(train, j, phase))
      parts.push([this.flows.stream(name).flow, stream(name)]);
    if (beta > 0 && after !== null) parts.push([beta * onward(j), leaving(after)]);
    if (parts.length === 1) return parts[0][1];
    const flow = parts.reduce((n, [q]) => n + q, 0);
    return flow > 0 ? parts.reduce((n, [q, c]) => n + q * c, 0) / flow : 0;
  }
}
