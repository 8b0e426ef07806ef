import { add, mul, sub } from '../math/expression.ts';
import { type Kernel, kernel } from '../math/kernel.ts';
import type { Train } from '../scenario/scenario.ts';
import type { Book } from './book.ts';
import type { Of } from './flow.ts';
import { perVolume } from './kernels.ts';
import type { Ref } from './ledger.ts';

const above = kernel('above', ['amount', 'volume', 'least', 'end'], (m, V, least, end) =>
  sub(mul(m, perVolume(V, least)), end),
);

/** Beyond the last measured point of an isotherm the figures rest on its end secant: said, with the time. */
export function writeRangeGuards(
  book: Book,
  equilibrium: Train['equilibrium'],
  path: string,
  places: Of<readonly Ref[]>,
  volume: Of<Ref>,
  least: Ref,
): void {
  equilibrium.forEach((law, i) => {
    if (law?.law !== 'table') return;
    for (const phase of ['aqueous', 'organic'] as const) {
      const end = law[phase][law[phase].length - 1];
      const name = `${path}.mixer.${phase}.${book.name(i)}`;
      book.ledger.guard(
        {
          name,
          direction: 1,
          message: `${name} rises above ${end} g/L, the end of the measured isotherm; from here on its last secant is used`,
          action: 'report',
        },
        above,
        places[phase][i],
        volume[phase],
        least,
        book.number(end),
      );
    }
  });
}

/** Share of what is typical by which a species may seem to lack through rounding alone. */
const ROUNDING = 1e-6;

const usedUp = new Map<number, Kernel>();

/** (w − Σ r·m_a)/V + bound: negative once more of a species has been taken up than there was. */
function remains(n: number): Kernel {
  const found = usedUp.get(n);
  if (found) return found;
  const pairs = Array.from({ length: n }, (_, i) => [`release ${i}`, `solute ${i}`]).flat();
  const made = kernel(
    `remains of ${n}`,
    ['carrier', 'volume', 'least', 'bound', ...pairs],
    (w, V, least, bound, ...rest) => {
      const taken = Array.from({ length: n }, (_, i) => mul(rest[2 * i], rest[2 * i + 1]));
      return add(mul(sub(w, add(...taken)), perVolume(V, least)), bound);
    },
  );
  usedUp.set(n, made);
  return made;
}

/** A law that does not know of the acid can strip with acid that is not there: said, with the time. */
export function writeSpeciesGuards(
  book: Book,
  path: string,
  places: readonly Ref[],
  volume: Ref,
  least: Ref,
): void {
  book.s.species.forEach((species, k) => {
    const bound = book.releasing(k, places);
    if (bound.length === 0 && !book.neutralised(k)) return;
    const component = book.solutes + k;
    book.ledger.guard(
      {
        name: `${path}.mixer ${species} used up`,
        direction: -1,
        message: `${species} in ${path}.mixer is used up: ${
          book.neutralised(k) ? 'more base is dosed or stripped' : 'the laws strip more'
        } than it can carry, and what follows is not to be trusted; look at the figures of ${species}`,
        action: 'report',
      },
      remains(bound.length / 2),
      ...[places[component], volume, least, book.number(ROUNDING * book.typical[component]), ...bound],
    );
  });
}
