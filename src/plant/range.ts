import { mul, sub } from '../math/expression.ts';
import { kernel } from '../math/kernel.ts';
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
  train: Train,
  path: string,
  places: Of<readonly Ref[]>,
  volume: Of<Ref>,
  least: Ref,
): void {
  train.equilibrium.forEach((law, i) => {
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
