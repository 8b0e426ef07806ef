import type { Feed, Phase } from '../scenario/scenario.ts';
import type { Book, Sink, Source } from './book.ts';
import { fed, product, same } from './kernels.ts';
import type { Ref } from './ledger.ts';
import { fedCarrier } from './released.ts';

/** Totals of one phase of a boundary stream: what went out, or (negative) what came in. */
export interface Totals {
  readonly stream: string;
  readonly phase: Phase;
  readonly side: 'in' | 'out';
  readonly components: readonly Ref[];
  readonly volume: Ref;
}

/** `carried` marks what a stream carries of the other phase. */
export function totals(
  book: Book,
  stream: string,
  phase: Phase,
  side: 'in' | 'out',
  carried = false,
): Totals {
  const total = (what: string, unit: string): Ref =>
    book.place(
      {
        path: `${stream}.${side}.${carried ? `carried ${phase} ` : ''}${what}`,
        unit,
        kind: 'total',
        scale: 1,
        floor: null,
      },
      0,
    );
  return {
    stream,
    phase,
    side,
    components: Array.from({ length: book.components(phase) }, (_, k) => total(book.name(k), 'kg')),
    volume: total('volume', 'm^3'),
  };
}

/** A feed: flow and concentrations are inputs; what enters leaves the feed's own (negative) totals. */
export class FeedWriter {
  readonly totals: Totals;
  readonly flow: Ref;
  readonly #book: Book;
  readonly #feed: Feed;
  readonly #content: readonly Ref[];

  /** `gate` turns the stated flow into the one that enters, where a stopped agitator can hold it back. */
  constructor(book: Book, f: Feed, gate: (flow: Ref) => Ref) {
    this.#book = book;
    this.#feed = f;
    this.flow = gate(book.input({ path: `${f.name}.flow`, unit: 'm^3/s', scale: f.flow }, f.flow));
    this.#content = Array.from({ length: book.components(f.phase) }, (_, k) =>
      book.input({ path: `${f.name}.${book.name(k)}`, unit: 'kg/m^3', scale: book.typical[k] }, f.content[k]),
    );
    this.totals = totals(book, f.name, f.phase, 'in');
  }

  source(): Source {
    return {
      send: (to) => this.#send(to),
      content: (k) => ({ kernel: same, args: [this.#content[k]] }),
    };
  }

  #send(to: Sink): void {
    const book = this.#book;
    for (const inlet of to[this.#feed.phase]) {
      const flow = inlet.share === null ? this.flow : book.signal(product, this.flow, inlet.share);
      this.#content.forEach((c, k) => {
        const move = { from: this.totals.components[k], to: inlet.places[k] };
        if (k < book.solutes) book.ledger.flux(fed, [flow, c], move);
        else {
          const bound = book.releasing(k - book.solutes, this.#content);
          book.ledger.flux(fedCarrier(bound.length / 2), [flow, c, ...bound], move);
        }
      });
      book.pass(flow, this.totals.volume, inlet.volume);
    }
  }
}
