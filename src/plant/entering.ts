import type { Network, Stream } from '../scenario/network.ts';
import type { Scenario, Train } from '../scenario/scenario.ts';
import { setFlows } from './design.ts';
import type { Of } from './flow.ts';
import type { Flows } from './flows.ts';

type Content = readonly number[];

/** What is in the streams and vessels at time zero, kg/m³ by component, as far as it follows from feeds and tanks. */
export class Entering {
  readonly #s: Scenario;
  readonly #net: Network;
  readonly #flows: Flows<number>;
  readonly #known = new Map<string, Content>();

  constructor(s: Scenario, net: Network) {
    this.#s = s;
    this.#net = net;
    this.#flows = setFlows(s, net);
  }

  /**
   * What a train's vessels hold at the barren start: the aqueous as what enters the train but without solutes, the
   * organic as the organic that enters it; or as the scenario says.
   */
  initial(t: Train): Of<Content> {
    const { aqueous, organic } = t.initial;
    // A base that more than neutralises what it meets leaves nothing.
    const liquor = (): Content => this.stream(t.aqueous.from).map((c) => Math.max(0, c));
    return {
      aqueous:
        aqueous === 'as entering'
          ? liquor()
          : aqueous === 'barren'
            ? liquor().map((c, k) => (k < this.#s.solutes.length ? 0 : c))
            : aqueous,
      organic: organic === 'as entering' ? this.stream(t.organic.from) : organic,
    };
  }

  /** A stream followed upstream to feeds and tanks, weighted by flow where several run together. */
  stream(name: string): Content {
    const found = this.#known.get(name);
    if (found) return found;
    const { maker } = this.#net.streams.get(name) as Stream;
    const made =
      maker.kind === 'feed'
        ? this.#s.feeds[maker.index].content
        : maker.kind === 'tank'
          ? this.#s.tanks[maker.index].content
          : this.#mean(this.#net.behind(name));
    this.#known.set(name, made);
    return made;
  }

  #mean(streams: readonly string[]): Content {
    if (streams.length === 1) return this.stream(streams[0]);
    const parts = streams.map((q) => ({ flow: this.#flows.stream(q).flow, content: this.stream(q) }));
    const total = parts.reduce((n, q) => n + q.flow, 0);
    return Array.from({ length: this.#s.solutes.length + this.#s.species.length }, (_, k) =>
      total > 0 ? parts.reduce((sum, q) => sum + q.flow * q.content[k], 0) / total : 0,
    );
  }
}
