import type { F } from './system.ts';
import type { Tableau } from './tableau.ts';

/** The two sums over earlier stages that a stage needs; u is stage-major. */
export interface Combine {
  /** to = x + Σ aⱼuⱼ */
  readonly state: (n: number, x: F, u: F, to: F) => void;
  /** to = dx + (1/h)·Σ cⱼuⱼ */
  readonly slope: (n: number, dx: F, u: F, to: F, perStep: number) => void;
}

const known = new WeakMap<Tableau, readonly Combine[]>();

/**
 * One fused loop a sum, its coefficients written into the text: seven passes over memory become one. The text
 * holds numbers of the table and nothing else.
 */
export function combinations(t: Tableau): readonly Combine[] {
  let made = known.get(t);
  if (!made) {
    made = t.alpha.map((_, i) => ({
      state: loop('n, x, u, to', `x[k]${sum(t.a[i])}`) as Combine['state'],
      slope: loop('n, dx, u, to, q', `dx[k] + q * (0${sum(t.c[i])})`) as Combine['slope'],
    }));
    known.set(t, made);
  }
  return made;
}

/** k, row-major: kₘ = Σⱼ dense[m][j]·uⱼ. */
export type DenseForm = (n: number, u: F, k: F) => void;

const forms = new WeakMap<Tableau, DenseForm>();

export function denseForm(t: Tableau): DenseForm {
  let made = forms.get(t);
  if (!made) {
    const rows = t.dense.map((row, m) => `to[${m} * n + k] = 0${sum(row)};`).join(' ');
    made = new Function('n', 'u', 'to', `"use strict"; for (let k = 0; k < n; k++) { ${rows} }`) as DenseForm;
    forms.set(t, made);
  }
  return made;
}

const sum = (weights: readonly number[]): string =>
  weights.map((v, j) => (v === 0 ? '' : ` + (${v}) * u[${j} * n + k]`)).join('');

function loop(args: string, value: string): unknown {
  return new Function(...args.split(', '), `"use strict"; for (let k = 0; k < n; k++) to[k] = ${value};`);
}
