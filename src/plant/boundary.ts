import type { Feed, Phase } from '../scenario/scenario.ts';
import type { Book, Source } from './book.ts';
import { fed, same } from './kernels.ts';
import type { Ref } from './ledger.ts';
import { fedCarrier } from './released.ts';

/** Totals of one boundary stream: what went out, or (negative) what came in. Last: volume of the carrier. */
export interface Totals {
  readonly stream: string;
  readonly phase: Phase;
  readonly side: 'in' | 'out';
  readonly components: readonly Ref[];
  readonly volume: Ref;
}

export function totals(book: Book, stream: string, phase: Phase, side: 'in' | 'out'): Totals {
  const total = (what: string, unit: string): Ref =>
    book.place({ path: `${stream}.${side}.${what}`, unit, kind: 'total', scale: 1, floor: null }, 0);
  return {
    stream,
    phase,
    side,
    components: Array.from({ length: book.components(phase) }, (_, k) => total(book.name(k), 'kg')),
    volume: total('volume', 'm^3'),
  };
}

/** A feed: flow and concentrations are inputs; what enters leaves the feed's own (negative) totals. */
export function writeFeed(book: Book, f: Feed): { readonly source: Source; readonly totals: Totals } {
  const flow = book.input({ path: `${f.name}.flow`, unit: 'm^3/s', scale: f.flow }, f.flow);
  const n = book.components(f.phase);
  const content = Array.from({ length: n }, (_, k) =>
    book.input({ path: `${f.name}.${book.name(k)}`, unit: 'kg/m^3', scale: book.typical[k] }, f.content[k]),
  );
  const entered = totals(book, f.name, f.phase, 'in');
  const source: Source = {
    flow,
    send(to) {
      for (let k = 0; k < n; k++) {
        const move = { from: entered.components[k], to: to[k] };
        if (k < book.solutes) book.ledger.flux(fed, [flow, content[k]], move);
        else {
          const bound = book.releasing(k - book.solutes, content);
          book.ledger.flux(fedCarrier(bound.length / 2), [flow, content[k], ...bound], move);
        }
      }
    },
    content: (k) => ({ kernel: same, args: [content[k]] }),
  };
  return { source, totals: entered };
}
