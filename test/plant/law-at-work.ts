import { type Derive, type Execution, generated, kernel } from '../../src/math/kernel.ts';
import { chemistry } from '../../src/plant/chemistry.ts';
import { noProperties, plainCircuit, plainTrain } from '../../src/scenario/plain.ts';
import type { Law, Phase, Scenario, Train } from '../../src/scenario/scenario.ts';

/** Concentrations at one point, g/L: one figure for each solute, and the acid. */
export interface Point {
  readonly aqueous?: readonly number[];
  readonly organic?: readonly number[];
  readonly acid?: number;
}

/** The laws of one train (solutes a, b, …; species acid) as plain functions, made the way a plant makes them. */
export class LawsAtWork {
  readonly #n: number;
  readonly #numbers: readonly number[];
  readonly #value: ((board: Float64Array) => number)[][];
  readonly #partial: ((board: Float64Array, arg: number) => number)[][];

  constructor(laws: readonly (Law | null)[], execution: Execution = generated) {
    const n = laws.length;
    const train: Train = {
      name: 'train',
      aqueous: { from: 'feed', to: 'raffinate' },
      organic: { from: 'solvent', to: 'extract' },
      stages: [],
      equilibrium: laws,
      initial: { aqueous: 'barren', organic: 'as entering' },
      ...plainTrain,
    };
    const solutes = laws.map((_, i) => String.fromCharCode(97 + i));
    const scenario: Scenario = {
      title: '',
      about: '',
      solutes,
      species: ['acid'],
      feeds: [],
      tanks: [],
      ...plainCircuit,
      trains: [train],
      releases: solutes.map(() => [0]),
      start: 'barren',
      properties: noProperties(laws.length),
      horizon: 1,
      recordEvery: 1,
      upsets: [],
      limits: [],
    };
    const c = chemistry(scenario, train.equilibrium);
    const args = [...solutes, ...solutes.map((q) => `organic ${q}`), 'acid', ...c.numbers.map((q) => q.name)];
    this.#n = n;
    this.#numbers = c.numbers.map((q) => q.value);
    const references = Int32Array.from([...args.keys(), 0]);
    const y = new Float64Array(1);
    const kernels = laws.map((_, i) =>
      (['aqueous', 'organic'] as const).map((side) =>
        kernel('law', args, (...e) =>
          c.equilibrium(
            i,
            side,
            { aqueous: e.slice(0, n), organic: e.slice(n, 2 * n), species: [e[2 * n]] },
            e.slice(2 * n + 1),
          ),
        ),
      ),
    );
    this.#value = kernels.map((pair) =>
      pair.map((k) => {
        const run = execution.run(k, 'assign');
        return (board) => {
          run(1, references, board, y);
          return y[0];
        };
      }),
    );
    this.#partial = kernels.map((pair) =>
      pair.map((k) => {
        const made = args.map(() => null as Derive | null);
        return (board, arg) => {
          made[arg] ??= execution.derive(k, [{ output: 0, arg }]);
          made[arg](1, references, board, y);
          return y[0];
        };
      }),
    );
  }

  /** c*_a or c*_o of a solute. */
  value(solute: number, side: Phase, at: Point): number {
    return this.#value[solute][side === 'aqueous' ? 0 : 1](this.#board(at));
  }

  /** Its derivative by the concentration of a solute in the other phase. */
  slope(solute: number, side: Phase, at: Point, by = solute): number {
    const arg = side === 'aqueous' ? this.#n + by : by;
    return this.#partial[solute][side === 'aqueous' ? 0 : 1](this.#board(at), arg);
  }

  byAcid(solute: number, side: Phase, at: Point): number {
    return this.#partial[solute][side === 'aqueous' ? 0 : 1](this.#board(at), 2 * this.#n);
  }

  #board({ aqueous = [], organic = [], acid = 1 }: Point): Float64Array {
    const fill = (list: readonly number[]): number[] =>
      Array.from({ length: this.#n }, (_, i) => list[i] ?? 0);
    return Float64Array.from([...fill(aqueous), ...fill(organic), acid, ...this.#numbers]);
  }
}

/** The law of a single solute: c_o(c_a), its inverse c_a(c_o), and their slopes. */
export function single(law: Law, acid = 1) {
  const w = new LawsAtWork([law]);
  return {
    organic: (c: number) => w.value(0, 'organic', { aqueous: [c], acid }),
    aqueous: (c: number) => w.value(0, 'aqueous', { organic: [c], acid }),
    organicSlope: (c: number) => w.slope(0, 'organic', { aqueous: [c], acid }),
    aqueousSlope: (c: number) => w.slope(0, 'aqueous', { organic: [c], acid }),
  };
}
