import { describe, expect, it } from 'vitest';
import { Elimination } from '../../src/solve/elimination.ts';
import { Rodas4, Rodas5P } from '../../src/solve/rodas-tableaus.ts';
import type { Place, System } from '../../src/solve/system.ts';
import type { Tableau } from '../../src/solve/tableau.ts';
import { release, workbench } from '../../src/solve/workbench.ts';
import { dominant, random, randomSparse, vector } from './problems/sparse.ts';

/** As much of a System as a bench asks for. */
const systemOf = (A: System['A']): System => ({ A }) as unknown as System;

describe('the elimination as code', () => {
  it.each([1, 2, 3, 7, 30, 200])('gives the bits of the list-wise one, %i equations', (n) => {
    for (const seed of [1, 2, 3]) {
      const next = random(seed);
      const a = randomSparse(n, 4, next, dominant);
      const bench = workbench(systemOf(a.pattern), Rodas5P);
      const oracle = new Elimination(a.pattern);
      for (const shift of [0, 0.3, 1e6]) {
        const b = vector(n, next);
        for (const e of [bench, oracle]) e.factor(a.values, shift);
        const [x, y] = [Float64Array.from(b), Float64Array.from(b)];
        bench.solve(x);
        oracle.solve(y);
        expect(x).toEqual(y);
        for (const e of [bench, oracle]) {
          e.b.set(b);
          e.measure(x);
        }
        expect(Float64Array.from(bench.r)).toEqual(oracle.r);
        expect(bench.worst[0]).toBeLessThan(1e-13);
        expect(Math.abs(bench.worst[0] - oracle.worst[0])).toBeLessThan(1e-18);
      }
    }
  });

  it('says what is no number', () => {
    const a = randomSparse(5, 2, random(1), dominant);
    const bench = workbench(systemOf(a.pattern), Rodas5P);
    bench.factor(a.values, 1);
    bench.b.fill(1);
    bench.measure(Float64Array.of(1, Number.NaN, 1, 1, 1));
    expect(bench.worst[0]).toBeNaN();
  });

  it('is used again by the next run of the same System, by one at a time', () => {
    const system = systemOf(randomSparse(4, 2, random(2), dominant).pattern);
    const first = workbench(system, Rodas5P);
    expect(workbench(system, Rodas5P)).not.toBe(first);
    release(system, Rodas5P, first);
    expect(workbench(system, Rodas5P)).toBe(first);
  });
});

describe.each([Rodas4, Rodas5P])('the sums of $name', (t: Tableau) => {
  // An odd number of places: the last pair is half empty.
  const n = 7;
  const next = random(5);
  const bench = workbench(systemOf(randomSparse(n, 2, next, dominant).pattern), t);
  const s = bench.steps;
  const u = t.alpha.map(() => vector(n, next));
  const x = vector(n, next);
  const dx = vector(n, next);
  const plus = (start: Float64Array, weights: readonly number[], factor = 1): number[] =>
    [...start].map((v, k) => v + factor * weights.reduce((sum, w, j) => sum + w * u[j][k], 0));
  const near = (own: Float64Array, wanted: readonly number[]): void => {
    wanted.forEach((v, k) => {
      expect(Math.abs(own[k] - v)).toBeLessThan(1e-13 * (1 + Math.abs(v)));
    });
  };
  s.x.set(x);
  s.dx.set(dx);
  u.forEach((own, i) => {
    bench.x.set(own);
    s.keep(i);
  });

  it('of states and slopes', () => {
    t.alpha.forEach((_, i) => {
      s.state(i);
      near(s.trial, plus(x, t.a[i]));
      s.perStep[0] = 3.7;
      s.slope(i);
      near(bench.x, plus(dx, t.c[i], 3.7));
    });
  });

  it('of the end: error over tolerance, what is not judged, and the floor', () => {
    const places = Array.from(
      { length: n },
      (_, i): Place => ({
        path: '',
        unit: '',
        scale: 1 + i,
        floor: i === 2 ? 5 : null,
        kind: i === 4 ? 'total' : 'amount',
      }),
    );
    s.tolerate(1e-3, places);
    const last = Float64Array.from({ length: n }, (_, i) => 1e-3 * (i === 4 ? 1e6 : i));
    bench.x.set(last);
    s.relative[0] = 1e-3;
    s.finish();
    near(
      s.x1,
      [...s.trial].map((v, k) => v + last[k]),
    );
    const errors = [...last].map((e, k) =>
      k === 4 ? 0 : e / (1e-3 * (1 + k) + 1e-3 * Math.max(Math.abs(x[k]), Math.abs(s.x1[k]))),
    );
    expect(s.error[0]).toBeCloseTo(Math.max(...errors), 12);
    expect(s.below[0]).toBeCloseTo(5 - 10 * 3e-3 - s.x1[2], 12);
    bench.x[4] = Number.NaN;
    s.finish();
    expect(s.error[0]).toBeNaN();
    bench.x.set(last);
    s.finish();
  });

  it('of dense output, which begins and ends where the step does', () => {
    s.dense();
    for (const [share, wanted] of [
      [0, x],
      [1, Float64Array.from(s.x1)],
    ] as const) {
      s.at(share);
      near(s.point, [...wanted]);
    }
    s.at(0.3);
    const k = t.dense.map((row) => plus(new Float64Array(n), row));
    near(
      s.point,
      [...x].map((v, i) => {
        const inner = k.reduceRight((sum, own) => own[i] + 0.3 * sum, 0);
        return 0.7 * v + 0.3 * (s.x1[i] + 0.7 * inner);
      }),
    );
  });
});
