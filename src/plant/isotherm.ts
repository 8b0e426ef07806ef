import { add, mul, sub } from '../math/expression.ts';
import { generated, kernel } from '../math/kernel.ts';
import type { Train } from '../scenario/scenario.ts';
import type { Plant } from './assemble.ts';
import { chemistry } from './chemistry.ts';

/**
 * The equilibrium curve c_o*(c_a) of one solute in a train, kg/m³, for drawing.
 *
 * Species that the transfer sets free follow c_species = entering + r·(c_a,entering − c_a), which is what a train
 * without other changes shows; other solutes are left out (the solute alone).
 */
export function isotherm(
  plant: Plant,
  train: Train,
  solute: number,
  entering: readonly number[],
): (ca: number) => number {
  const { scenario: s } = plant;
  const chem = chemistry(s, train);
  const species = s.species.map((_, k) => k);
  const k = kernel(
    'isotherm',
    [
      'c_a',
      'entering',
      ...s.species,
      ...s.species.map((n) => `release ${n}`),
      ...chem.numbers.map((q) => q.name),
    ],
    (ca, from, ...rest) => {
      const zero = mul(ca, 0);
      const at = {
        aqueous: s.solutes.map((_, i) => (i === solute ? ca : zero)),
        organic: s.solutes.map(() => zero),
        species: species.map((q) => add(rest[q], mul(rest[species.length + q], sub(from, ca)))),
      };
      return chem.equilibrium(solute, 'organic', at, rest.slice(2 * species.length));
    },
  );
  const run = generated.run(k, 'assign');
  const board = Float64Array.from([
    0,
    entering[solute],
    ...entering.slice(s.solutes.length),
    ...s.releases[solute],
    ...chem.numbers.map((q) => q.value),
  ]);
  const references = Int32Array.from([...board.keys(), 0]);
  const y = new Float64Array(1);
  return (ca) => {
    board[0] = ca;
    run(1, references, board, y);
    return y[0];
  };
}
