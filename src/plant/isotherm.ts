import { add, mul, sub } from '../math/expression.ts';
import { generated, type Kernel, kernel } from '../math/kernel.ts';
import type { Phase, Train } from '../scenario/scenario.ts';
import type { Plant } from './assemble.ts';
import { type Chemistry, chemistry } from './chemistry.ts';

/** Evaluates a kernel of one output on plain numbers. */
function plain(k: Kernel): (args: readonly number[]) => number {
  const run = generated.run(k, 'assign');
  const board = new Float64Array(k.args.length);
  const references = Int32Array.from([...board.keys(), 0]);
  const y = new Float64Array(1);
  return (args) => {
    board.set(args);
    run(1, references, board, y);
    return y[0];
  };
}

const lawNumbers = (c: Chemistry): number[] => c.numbers.map((q) => q.value);

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
  const chem = chemistry(s, train.equilibrium);
  const species = s.species.map((_, k) => k);
  const f = plain(
    kernel(
      'isotherm',
      [
        ...['c_a', 'entering', ...s.species],
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
    ),
  );
  const fixed = [
    entering[solute],
    ...entering.slice(s.solutes.length),
    ...s.releases[solute],
    ...lawNumbers(chem),
  ];
  return (ca) => f([ca, ...fixed]);
}

/**
 * c* of one solute at a point where all concentrations are known, kg/m³: on the aqueous side c*_a of the organic as it
 * is, on the organic side c*_o of the aqueous as it is. `aqueous` holds solutes, then species; `organic` solutes.
 */
export function equilibriumAt(
  plant: Plant,
  train: Train,
  solute: number,
  side: Phase,
): (aqueous: readonly number[], organic: readonly number[]) => number {
  const { scenario: s } = plant;
  const chem = chemistry(s, train.equilibrium);
  const n = s.solutes.length;
  const f = plain(
    kernel(
      'equilibrium',
      [
        ...s.solutes,
        ...s.species,
        ...s.solutes.map((q) => `organic ${q}`),
        ...chem.numbers.map((q) => q.name),
      ],
      (...args) => {
        const at = {
          aqueous: args.slice(0, n),
          species: args.slice(n, n + s.species.length),
          organic: args.slice(n + s.species.length, 2 * n + s.species.length),
        };
        return chem.equilibrium(solute, side, at, args.slice(2 * n + s.species.length));
      },
    ),
  );
  const fixed = lawNumbers(chem);
  return (aqueous, organic) => f([...aqueous, ...organic, ...fixed]);
}
