import { add, div, mul, sub } from '../math/expression.ts';
import { kernel } from '../math/kernel.ts';
import { smoothStep } from '../math/shapes.ts';
import type { Tank } from '../scenario/scenario.ts';
import type { Book, Part } from './book.ts';
import { type Totals, totals } from './boundary.ts';
import { difference, passed, product } from './kernels.ts';
import type { Ref } from './ledger.ts';

/** Share of the typical concentration below which a removal at a fixed rate ceases: there is nothing left to take. */
const CEASES = 0.01;

/** A fixed rate as long as there is enough of the solute in the tank. */
const atRate = kernel('removal at a rate', ['rate', 'amount', 'volume', 'least'], (rate, m, V, least) =>
  mul(rate, smoothStep(div(m, mul(V, least)))),
);

const above = kernel('content above', ['amount', 'volume', 'least'], (m, V, least) => sub(div(m, V), least));

/**
 * Of what flows in, the share s does not flow out again: N = s/(1 − s)·Q·c, by the balance of a well-mixed tank at rest,
 * Q·c_in = Q·c + N with c = (1 − s)·c_in.
 */
const byShare = kernel('removal by share', ['share', 'flow', 'amount', 'per volume'], (s, Q, m, perV) =>
  mul(div(s, add(sub(1, s), 1e-9)), Q, m, perV),
);

/**
 * What a tank takes out of its liquor, and what that gives back. With the carrier w = species + Σ r·solute a removed
 * solute leaves r times as much species behind; where another return ρ is stated, (ρ − r) times the removal goes into w.
 */
export function writeRemovals(book: Book, t: Tank, part: Part, volume: Ref, flow: Ref): Totals | null {
  if (t.removes.every((r) => r === null)) return null;
  const { s, ledger } = book;
  const out = totals(book, `${t.name} removal`, t.phase, 'out');
  t.removes.forEach((r, i) => {
    if (r === null) return;
    const m = part.places[i];
    const path = `${t.name}.removal of ${s.solutes[i]}`;
    const rate =
      'rate' in r.how
        ? book.signal(
            atRate,
            book.input({ path, unit: 'kg/s', scale: r.how.rate }, r.how.rate),
            m,
            volume,
            book.number(CEASES * book.typical[i]),
          )
        : book.signal(
            byShare,
            book.input({ path, unit: '', scale: 1 }, r.how.share),
            flow,
            m,
            part.perVolume,
          );
    if ('rate' in r.how)
      ledger.guard(
        {
          name: `${path} ceases`,
          direction: -1,
          message: `${t.name} holds too little ${s.solutes[i]}: less is taken out of it than asked`,
          fromStart: true,
          action: 'report',
        },
        above,
        m,
        volume,
        book.number(CEASES * book.typical[i]),
      );
    ledger.flux(passed, [rate], { from: m, to: out.components[i] });
    book.showValue(path, 'kg/s', 'rate' in r.how ? r.how.rate : 1, rate);
    r.returns?.forEach((back, k) => {
      const bound = book.releases[i][k] ?? book.number(0);
      const w = book.solutes + k;
      const more = book.signal(product, rate, book.signal(difference, bound, book.number(back)));
      ledger.flux(passed, [more], { from: part.places[w], to: out.components[w] });
    });
  });
  return out;
}
