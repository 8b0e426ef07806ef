import type { Phase } from '../scenario/scenario.ts';
import { type Book, NEARLY_EMPTY, type Part } from './book.ts';
import { partFlow, perPart, product, rest } from './kernels.ts';
import type { Ref } from './ledger.ts';

/** What flows into a layer: everything in some places at a rate (1/s). */
export interface Feeder {
  readonly places: readonly Ref[];
  readonly rate: Ref;
}

export interface LayerFlows {
  readonly volume: Ref;
  /** m³ at design. */
  readonly size: number;
  readonly into: Ref;
  readonly out: Ref;
  /** Whether inflow and outflow can differ. */
  readonly moves: boolean;
  readonly shortCircuit: number;
}

/** A settler layer: from what flows in to the last part, which is what leaves. Returns that part. */
export function writeLayer(
  book: Book,
  path: string,
  phase: Phase,
  parts: readonly (readonly Ref[])[],
  feeders: readonly Feeder[],
  l: LayerFlows,
): Part {
  const n = parts.length;
  const perVolume = book.signal(perPart, l.volume, book.number(n), book.number(l.size * NEARLY_EMPTY));
  const made = parts.map(
    (places, k): Part => ({ phase, path: `${path}.settler.${k + 1}`, places, perVolume }),
  );
  const last = made[n - 1];
  const short = n > 1 ? l.shortCircuit : 0;
  for (const f of feeders) {
    if (short === 0) book.drain(f, f.rate, made[0].places);
    else {
      const share = book.number(short);
      book.drain(f, book.signal(product, f.rate, book.signal(rest, share)), made[0].places);
      book.drain(f, book.signal(product, f.rate, share), last.places);
    }
  }
  for (let k = 1; k < n; k++) {
    const flow =
      l.moves || short > 0
        ? book.signal(partFlow, l.into, l.out, book.number(short), book.number(k / n))
        : l.out;
    book.drain(made[k - 1], book.signal(product, flow, perVolume), made[k].places);
  }
  return last;
}
