import { call, div, type Special } from '../../math/expression.ts';
import { MonotoneCubic } from '../../math/monotone-cubic.ts';
import type { Law } from '../../scenario/scenario.ts';
import type { LawKind } from './law.ts';

type Table = Extract<Law, { law: 'table' }>;

interface Curves {
  readonly forward: Special;
  readonly inverse: Special;
}

const known = new WeakMap<Table, Curves>();
let count = 0;

/** The cubic is c_o(c_a); its inverse is the inverse of that curve, not a second cubic through swapped columns. */
function curves(law: Table): Curves {
  const found = known.get(law);
  if (found) return found;
  const cubic = new MonotoneCubic(law.aqueous, law.organic);
  count += 1;
  const slope: Special = {
    name: `slope of table ${count}`,
    evaluate: (c) => cubic.slope(c),
    partials: () => {
      throw new Error('a table has no second derivative');
    },
  };
  const made: Curves = {
    forward: {
      name: `table ${count}`,
      evaluate: (c) => cubic.value(c),
      partials: ([c]) => [call(slope, c)],
    },
    inverse: {
      name: `inverse of table ${count}`,
      evaluate: (c) => cubic.inverse(c),
      partials: (_, self) => [div(1, call(slope, self))],
    },
  };
  known.set(law, made);
  return made;
}

/** Measured isotherm points joined by a monotone cubic; beyond the last point its end secant goes on. */
export const table: LawKind<Table> = {
  numbers: () => [],
  structure: (l) => curves(l).forward.name,
  aqueous: ({ solute, law }, at) => call(curves(law).inverse, at.organic[solute]),
  organic: ({ solute, law }, at) => call(curves(law).forward, at.aqueous[solute]),
};
