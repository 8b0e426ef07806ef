import { describe, expect, it } from 'vitest';
import type { Expr } from '../../src/math/expression.ts';
import {
  dispersedFilm,
  dispersing,
  dropDiameter,
  dropSizes,
  leastSpeed,
  power,
  type Stirred,
  specificArea,
} from '../../src/plant/agitator.ts';
import type { DropSizeName } from '../../src/scenario/plain.ts';
import { evaluate } from '../support/evaluate.ts';

const plant = {
  speed: 2,
  diameter: 0.5,
  vessel: 1.5,
  powerNumber: 5.7,
  continuousDensity: 820,
  dispersedDensity: 1030,
  continuousViscosity: 2.4e-3,
  dispersedViscosity: 1.1e-3,
  tension: 0.025,
  dispersed: 0.45,
  continuous: 0.55,
};
type Numbers = typeof plant;
const at = (change: Partial<Numbers>, f: (s: Stirred) => Expr): number =>
  evaluate({ ...plant, ...change }, (s) => [f(s)])[0];
const drop = (change: Partial<Numbers>, name: DropSizeName = 'mlynek-resnick'): number =>
  at(change, (s) => dropDiameter(name, s));

describe('drops (scaling laws follow from We^-0.6; constants are published values from memory)', () => {
  it.each(Object.keys(dropSizes).filter((n) => n !== 'gnanasundaram') as DropSizeName[])(
    '%s: d32 goes with N^-1.2, D^-0.8, σ^0.6',
    (name) => {
      const base = drop({}, name);
      expect(drop({ speed: 4 }, name) / base).toBeCloseTo(2 ** -1.2, 12);
      expect(drop({ diameter: 1 }, name) / base).toBeCloseTo(2 ** -0.8, 12);
      expect(drop({ tension: 0.05 }, name) / base).toBeCloseTo(2 ** 0.6, 12);
    },
  );

  it('keep their size at constant power per volume and geometry (Hinze 1955)', () => {
    // P/V ~ N³D², so N ~ D^(−2/3).
    expect(drop({ diameter: 1, vessel: 3, speed: 2 * 2 ** (-2 / 3) })).toBeCloseTo(drop({}), 12);
  });

  it('by hand: We = 820·2²·0.5³/0.025 = 16400, d32 = 0.5·0.058·(1 + 5.4·0.45)·16400^-0.6', () => {
    expect(drop({})).toBeCloseTo(0.5 * 0.058 * (1 + 5.4 * 0.45) * 16400 ** -0.6, 12);
  });

  it('give the area 6φ/d32 while there is a continuous phase', () => {
    const area = at({}, (s) => specificArea(s, dropDiameter('mlynek-resnick', s)));
    expect(area).toBeCloseTo((6 * 0.45) / drop({}), 6);
    expect(
      at({ dispersed: 1, continuous: 0 }, (s) => specificArea(s, dropDiameter('mlynek-resnick', s))),
    ).toBe(0);
  });
});

describe('power and least speed', () => {
  it('P = Np·ρ·N³·D⁵', () => {
    expect(at({}, power)).toBeCloseTo(5.7 * (0.55 * 820 + 0.45 * 1030) * 8 * 0.5 ** 5, 9);
  });

  /*
   * Furfural-water/toluene, Seader & Henley, Separation Process Principles, Example 8.4: geometry from memory (Di 0.9434 ft,
   * DT 2.830 ft, phase fractions 0.613/0.387); the speeds are Skelland & Ramsay (1987) evaluated on these figures.
   */
  const lb = 16.018463;
  const ft = 0.3048;
  const water = { density: 62.3 * lb, viscosity: 0.89e-3 };
  const toluene = { density: 54.2 * lb, viscosity: 0.59e-3 };
  const example = (c: typeof water, d: typeof water, phi: number): Partial<Numbers> => ({
    diameter: 0.9434 * ft,
    vessel: 2.83 * ft,
    continuousDensity: c.density,
    dispersedDensity: d.density,
    continuousViscosity: c.viscosity,
    dispersedViscosity: d.viscosity,
    tension: 0.025,
    dispersed: phi,
    continuous: 1 - phi,
  });

  it.each([
    ['water dispersed', example(toluene, water, 0.613), 161, 0.274],
    ['toluene dispersed', example(water, toluene, 0.387), 153, 0.237],
  ])('%s: least speed and power of the worked example', (_, numbers, rpm, hp) => {
    const least = at(numbers, leastSpeed);
    expect(Math.abs(least * 60 - rpm)).toBeLessThan(1);
    expect(Math.abs(at({ ...numbers, speed: least }, power) / 745.7 - hp)).toBeLessThan(0.006);
  });

  it('nothing is dispersed at half the least speed, everything at it', () => {
    const least = at({}, leastSpeed);
    expect(at({ speed: 0.5 * least }, dispersing)).toBe(0);
    expect(at({ speed: 0.75 * least }, dispersing)).toBeCloseTo(0.5, 12);
    expect(at({ speed: least }, dispersing)).toBe(1);
  });
});

describe('films', () => {
  it('the dispersed side is Sh = 6.6 (Treybal; 2π²/3 = 6.58 for a rigid drop after long times)', () => {
    const k = evaluate({ d: 3e-4, D: 2e-10 }, ({ d, D }) => [dispersedFilm(d, D)])[0];
    expect((k * 3e-4) / 2e-10).toBeCloseTo(6.6, 12);
    expect(Math.abs(6.6 - (2 * Math.PI ** 2) / 3)).toBeLessThan(0.03);
  });
});
