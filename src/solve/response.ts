import { LinearSolver } from './linear.ts';
import type { F, Pattern, System } from './system.ts';

/** How a small swing of one input comes out: y = H·w with H complex, by output in the System's order. */
export interface Response {
  /** rad/s */
  readonly frequency: number;
  readonly re: F;
  readonly im: F;
}

/**
 * Exact frequency response of the linearisation at a state: H(jω) = C·(jω·I − A)⁻¹·B + D, one column for one input.
 *
 * The complex system is solved as a real sparse one of twice the order, with x = u + j·v:
 * −A·u − ω·v = b and ω·u − A·v = 0, that is (0·I − M)·(u, v) = (b, 0) with M = [A, ω·I; −ω·I, A].
 * Reference: K. J. Åström and R. M. Murray, Feedback Systems (2008), Sec. 8.1 (from memory).
 */
export class FrequencyResponse {
  readonly #system: System;
  readonly #a: F;
  readonly #b: F;
  readonly #c: F;
  readonly #d: F;
  readonly #pattern: Pattern;
  readonly #linear: LinearSolver;
  /** Slots of M: entries of A above, of A below, and of ±ω. */
  readonly #from: Int32Array;
  readonly #input: number;

  constructor(system: System, x: F, w: F, p: F, input: number) {
    this.#system = system;
    this.#input = input;
    this.#a = new Float64Array(system.A.column.length);
    this.#b = new Float64Array(system.B.column.length);
    this.#c = new Float64Array(system.C.column.length);
    this.#d = new Float64Array(system.D.column.length);
    system.jacobian(x, w, p, this.#a);
    system.byInput(x, w, p, this.#b);
    system.byOutput(x, w, p, this.#c, this.#d);
    [this.#pattern, this.#from] = doubled(system.A);
    this.#linear = new LinearSolver(this.#pattern);
  }

  /** At a frequency [rad/s]; null where the system cannot be solved there. */
  at(frequency: number): Response | null {
    const { B, C, D, places, outputs } = this.#system;
    const n = places.length;
    const values = new Float64Array(this.#pattern.column.length);
    this.#from.forEach((from, k) => {
      values[k] = from >= 0 ? this.#a[from] : from === -1 ? frequency : -frequency;
    });
    const x = new Float64Array(2 * n);
    for (let i = 0; i < n; i++) x[i] = entry(B, this.#b, i, this.#input);
    this.#linear.factor(values, 0);
    if (!this.#linear.solve(x) || !x.every(Number.isFinite)) return null;
    const re = new Float64Array(outputs.length);
    const im = new Float64Array(outputs.length);
    for (let o = 0; o < outputs.length; o++) {
      re[o] = entry(D, this.#d, o, this.#input);
      for (let k = C.rowStart[o]; k < C.rowStart[o + 1]; k++) {
        re[o] += this.#c[k] * x[C.column[k]];
        im[o] += this.#c[k] * x[n + C.column[k]];
      }
    }
    return { frequency, re, im };
  }
}

function entry({ rowStart, column }: Pattern, values: F, row: number, col: number): number {
  for (let k = rowStart[row]; k < rowStart[row + 1]; k++) if (column[k] === col) return values[k];
  return 0;
}

/** The pattern of M, and for each of its slots the slot of A (≥ 0), or −1 for ω and −2 for −ω. */
function doubled({ rowStart, column }: Pattern): [Pattern, Int32Array] {
  const n = rowStart.length - 1;
  const rows: number[] = [0];
  const columns: number[] = [];
  const from: number[] = [];
  for (const half of [0, 1])
    for (let i = 0; i < n; i++) {
      const own: [number, number][] = [[half === 0 ? n + i : i, half === 0 ? -1 : -2]];
      for (let k = rowStart[i]; k < rowStart[i + 1]; k++) own.push([half * n + column[k], k]);
      own.sort((a, b) => a[0] - b[0]);
      for (const [c, f] of own) {
        columns.push(c);
        from.push(f);
      }
      rows.push(columns.length);
    }
  return [{ rowStart: Int32Array.from(rows), column: Int32Array.from(columns) }, Int32Array.from(from)];
}
