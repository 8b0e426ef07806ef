import { describe, expect, it } from 'vitest';
import { differentiate } from '../../src/math/differentiate.ts';
import { add, div, input, mul } from '../../src/math/expression.ts';
import { interfaceConcentration } from '../../src/plant/interface.ts';
import { evaluate } from '../support/evaluate.ts';

// f(x) = m·x and f(x) = cap·b·x/(1 + b·x), over the slots x, then their numbers.
const straight = mul(input(1), input(0));
const bent = div(mul(input(1), input(2), input(0)), add(1, mul(input(2), input(0))));

describe('the interface of two films', () => {
  it('gives the two-film identity 1/K_a = 1/k_a + 1/(m·k_o) for a constant ratio (Lewis & Whitman 1924)', () => {
    const [ka, ko, m, ca, co] = [2e-5, 7e-6, 3.2, 4, 1.5];
    const r = ka / ko;
    const [x] = evaluate({ b: co + r * ca, r, m }, (n) => [
      interfaceConcentration(straight, 2, n.b, n.r, [n.m]),
    ]);
    const overall = 1 / (1 / ka + 1 / (m * ko));
    expect(ka * (ca - x)).toBeCloseTo(overall * (ca - co / m), 15);
    expect(ko * (m * x - co)).toBeCloseTo(overall * (ca - co / m), 15);
  });

  it('has equal fluxes on both sides for a curve that bends, either way round', () => {
    for (const [ca, co] of [
      [4, 1.5],
      [0.01, 9],
      [0, 0],
    ]) {
      const [r, cap, b] = [2.5, 12, 1.2];
      const [x] = evaluate({ b: co + r * ca, r, cap, k: b }, (n) => [
        interfaceConcentration(bent, 3, n.b, n.r, [n.cap, n.k]),
      ]);
      expect(r * (ca - x)).toBeCloseTo((cap * b * x) / (1 + b * x) - co, 10);
    }
  });

  it('answers far out too, where the curve is lost in the last digit of b, or is no curve at all', () => {
    const at = (b: number, cap: number): number =>
      evaluate({ b, r: 2.5, cap, k: 1.2 }, (n) => [
        interfaceConcentration(bent, 3, n.b, n.r, [n.cap, n.k]),
      ])[0];
    for (const b of [5.069967892e9, 4.3e23, 1.7e301, 3.3e-300])
      expect(at(b, 12) / (b / 2.5)).toBeLessThanOrEqual(1);
    for (let k = 0; k < 300; k++) {
      const b = 1.37 ** k * 1e7;
      expect(at(b, 12) / (b / 2.5)).toBeCloseTo(1, 5);
    }
    // A capacity below zero, as a trial state may ask for, has no root: the step is refused, the run goes on.
    expect(at(7, -40)).toBeNaN();
  });

  it('has the slopes that differences show', () => {
    const numbers = { b: 7, r: 2.5, cap: 12, k: 1.2 };
    const value = (n: typeof numbers): number =>
      evaluate(n, (q) => [interfaceConcentration(bent, 3, q.b, q.r, [q.cap, q.k])])[0];
    const names = Object.keys(numbers) as (keyof typeof numbers)[];
    const slopes = evaluate(numbers, (q) => {
      const x = interfaceConcentration(bent, 3, q.b, q.r, [q.cap, q.k]);
      return names.map((_, i) => differentiate(x, i));
    });
    names.forEach((name, i) => {
      const h = 1e-5 * numbers[name];
      const difference =
        (value({ ...numbers, [name]: numbers[name] + h }) -
          value({ ...numbers, [name]: numbers[name] - h })) /
        (2 * h);
      expect(slopes[i]).toBeCloseTo(difference, 6);
    });
  });
});
