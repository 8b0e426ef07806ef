import { Matrix } from 'ml-matrix';
import { expm } from '../support/expm.ts';

/** A cascade with c_o = D·c_a and constant flows: all of it is linear. Units as in the plant: m³, m³/s, 1/s. */
export interface LinearCascade {
  readonly stages: number;
  readonly aqueous: number;
  readonly organic: number;
  readonly D: number;
  readonly ka: number;
  readonly mixer: number;
  readonly layers: { readonly aqueous: number; readonly organic: number };
  readonly parts: number;
}

/** The input on a piece of time: feed concentration at its start, its slope, and how long. */
export interface Piece {
  readonly from: number;
  readonly slope: number;
  readonly lasts: number;
}

/**
 * Concentrations stage by stage, each with mixer aqueous, mixer organic, aqueous parts, organic parts. Written down
 * from the balances alone: a well-mixed volume v takes in and gives up the same flow q, v·dc/dt = q·(c_in − c), and
 * in the mixer K·a·V·(c_a − c_o/D) passes from the aqueous share of V to the organic share.
 */
export class LinearModel {
  readonly #c: LinearCascade;
  readonly #a: Matrix;
  readonly #feed: number[];
  readonly #solvent: number[];

  constructor(c: LinearCascade) {
    this.#c = c;
    const n = this.size;
    this.#a = Matrix.zeros(n, n);
    this.#feed = new Array(n).fill(0);
    this.#solvent = new Array(n).fill(0);
    const both = c.aqueous + c.organic;
    for (let j = 0; j < c.stages; j++) {
      const volume = { aqueous: (c.mixer * c.aqueous) / both, organic: (c.mixer * c.organic) / both };
      const [x, y] = [this.at(j, 'aqueous', 0), this.at(j, 'organic', 0)];
      const before = j === 0 ? null : this.at(j - 1, 'aqueous', c.parts);
      const behind = j === c.stages - 1 ? null : this.at(j + 1, 'organic', c.parts);
      this.#passes(x, before, c.aqueous / volume.aqueous, this.#feed);
      this.#passes(y, behind, c.organic / volume.organic, this.#solvent);
      const transfer = c.ka * c.mixer;
      this.#add(x, x, -transfer / volume.aqueous);
      this.#add(x, y, transfer / volume.aqueous / c.D);
      this.#add(y, x, transfer / volume.organic);
      this.#add(y, y, -transfer / volume.organic / c.D);
      for (const phase of ['aqueous', 'organic'] as const)
        for (let k = 1; k <= c.parts; k++)
          this.#passes(
            this.at(j, phase, k),
            this.at(j, phase, k - 1),
            (c[phase] * c.parts) / c.layers[phase],
            [],
          );
    }
  }

  get size(): number {
    return this.#c.stages * (2 + 2 * this.#c.parts);
  }

  /** Index of the mixer (part 0) or of a settler part of a phase. */
  at(stage: number, phase: 'aqueous' | 'organic', part: number): number {
    const n = this.#c.parts;
    const own = stage * (2 + 2 * n);
    if (part === 0) return own + (phase === 'aqueous' ? 0 : 1);
    return own + 1 + part + (phase === 'aqueous' ? 0 : n);
  }

  /**
   * States at equally spaced times over pieces of a feed that is straight in time. With u the feed and u̇ its slope,
   * (x, u, u̇, 1) obeys a constant matrix, so each step is one multiplication by its exponential.
   */
  follow(initial: readonly number[], solvent: number, pieces: readonly Piece[], every: number): number[][] {
    const n = this.size;
    const m = Matrix.zeros(n + 3, n + 3);
    m.setSubMatrix(this.#a, 0, 0);
    for (let i = 0; i < n; i++) {
      m.set(i, n, this.#feed[i]);
      m.set(i, n + 2, this.#solvent[i] * solvent);
    }
    m.set(n, n + 1, 1);
    const step = expm(m.mul(every));
    let x = [...initial];
    const states = [x];
    for (const p of pieces) {
      let z = Matrix.columnVector([...x, p.from, p.slope, 1]);
      for (let k = 0; k < Math.round(p.lasts / every); k++) {
        z = step.mmul(z);
        x = z.getColumn(0).slice(0, n);
        states.push(x);
      }
    }
    return states;
  }

  #add(row: number, column: number, v: number): void {
    this.#a.set(row, column, this.#a.get(row, column) + v);
  }

  #passes(to: number, from: number | null, rate: number, outside: number[]): void {
    this.#add(to, to, -rate);
    if (from === null) outside[to] = rate;
    else this.#add(to, from, rate);
  }
}
