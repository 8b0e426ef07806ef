import { describe, expect, it } from 'vitest';
import { differentiate } from '../../src/math/differentiate.ts';
import { smoothStep, steepPower } from '../../src/math/shapes.ts';
import { coalescedByHyperbola, coalescedByPower, floodedShare } from '../../src/plant/band-law.ts';
import { bandThickness, hyperbola } from '../../src/plant/design.ts';
import {
  aqueousOverWeir,
  headFor,
  legLevel,
  organicThroughPort,
  overWeir,
  WEIR,
} from '../../src/plant/weir-law.ts';
import { evaluate } from '../support/evaluate.ts';

describe('dispersion band', () => {
  const power = { thickness: 0.06, at: 2.4 / 3600, law: { exponent: 3 } };

  it.each([
    [3, 1.2 ** 3],
    [5, 1.2 ** 5],
  ])(
    'with exponent %d a fifth more flow thickens it by the power (Ryon, Daley & Lowrie 1959)',
    (exponent, factor) => {
      const b = { ...power, law: { exponent } };
      expect(bandThickness(b, 1.2 * b.at) / bandThickness(b, b.at)).toBeCloseTo(factor, 12);
    },
  );

  it('coalesces exactly what the steady law says it carries, at any thickness above a millimetre', () => {
    const kappa = power.thickness / power.at ** 3;
    for (const H of [0.002, 0.06, 0.2]) {
      const [q] = evaluate({ H, A: 180, kappa, p: 3 }, (n) => [coalescedByPower(n.H, n.A, n.kappa, n.p)]);
      expect(bandThickness(power, q / 180)).toBeCloseTo(H, 10);
    }
  });

  it('has a finite, continuous slope where it vanishes', () => {
    const kappa = power.thickness / power.at ** 3;
    const at = (H: number): number[] =>
      evaluate({ H, A: 180, kappa, p: 3 }, (n) => {
        const q = coalescedByPower(n.H, n.A, n.kappa, n.p);
        return [q, differentiate(q, 0)];
      });
    for (const joint of [0, 1e-3]) {
      const [below, above] = [at(joint - 1e-9), at(joint + 1e-9)];
      expect(Math.abs(above[0] - below[0])).toBeLessThan(1e-6);
      expect(Math.abs(above[1] / below[1] - 1)).toBeLessThan(1e-4);
      expect(Number.isFinite(above[1])).toBe(true);
    }
    expect(at(-1e-4)[0]).toBeLessThan(0);
  });

  it('the hyperbolic law passes through the measured point and never carries more than its flooding flux (Stönner & Wöhler 1975)', () => {
    const b = { thickness: 0.06, at: 2.4 / 3600, law: { floodsAt: 6 / 3600 } };
    const { k1, k2 } = hyperbola(b);
    expect(bandThickness(b, b.at)).toBeCloseTo(0.06, 12);
    const [q, much] = evaluate({ H: 0.06, far: 1e6, A: 1, k1, k2 }, (n) => [
      coalescedByHyperbola(n.H, n.A, n.k1, n.k2),
      coalescedByHyperbola(n.far, n.A, n.k1, n.k2),
    ]);
    expect(q).toBeCloseTo(b.at, 12);
    expect(much).toBeLessThan(6 / 3600);
    expect(bandThickness(b, 6 / 3600)).toBe(Infinity);
  });

  it('floods from 95 % of the depth it has', () => {
    const share = (H: number): number => evaluate({ H, m: 0.3 }, (n) => [floodedShare(n.H, n.m)])[0];
    expect(share(0.28)).toBe(0);
    expect(share(0.3 * 0.975)).toBeCloseTo(0.5, 10);
    expect(share(0.31)).toBe(1);
  });
});

describe('weirs', () => {
  it('the handbook decanter: depth 3.6 ft, interface 1.8 ft, 54 over 72 lb/ft³: the heavy overflow stands at 3.15 ft', () => {
    // W. L. McCabe, J. C. Smith and P. Harriott, Unit Operations, Example 2.3 (from memory, recomputed).
    const [leg] = evaluate({ a: 1.8, o: 1.8, ratio: 54 / 72, loss: 0 }, (n) => [
      legLevel(n.a, n.o, n.ratio, n.loss),
    ]);
    expect(leg).toBeCloseTo(3.15, 12);
    // Z_i = [Z_h − Z_l·ρ_l/ρ_h]/(1 − ρ_l/ρ_h), the same balance solved for the interface.
    expect((3.15 - 3.6 * 0.75) / (1 - 0.75)).toBeCloseTo(1.8, 12);
  });

  it('Q = 1.84·L·h^1.5 (Francis), nothing below the crest, and the head for a flow is its inverse', () => {
    const q = (h: number): number => evaluate({ L: 8, h }, (n) => [overWeir(n.L, n.h)])[0];
    expect(q(0.04)).toBeCloseTo(WEIR * 8 * 0.008, 12);
    expect(q(-0.01)).toBe(0);
    expect(headFor(q(0.04), 8)).toBeCloseTo(0.04, 12);
  });

  it('the interface is lost at the port below and at the crest above, smoothly', () => {
    const low = (z: number): number =>
      evaluate({ z, port: 0.05 }, (n) => [organicThroughPort(n.z, n.port)])[0];
    const high = (z: number): number =>
      evaluate({ z, crest: 0.6 }, (n) => [aqueousOverWeir(n.z, n.crest)])[0];
    expect([low(0.3), low(0.051), low(0)]).toEqual([0, 0, 1]);
    expect([high(0.3), high(0.549), high(0.6)]).toEqual([0, 0, 1]);
    expect(high(0.575)).toBeCloseTo(0.5, 10);
  });
});

describe('smooth shapes', () => {
  it('S(x) = 3x² − 2x³ clipped', () => {
    const s = (x: number): number => evaluate({ x }, (n) => [smoothStep(n.x)])[0];
    expect([s(-1), s(0), s(0.5), s(1), s(2)]).toEqual([0, 0, 0.5, 1, 1]);
  });

  it('a steep power is exact above its joint', () => {
    const [v] = evaluate({ c: 0.5, k: 2, s: 0.3 }, (n) => [steepPower(n.c, n.k, n.s, 1e-3)]);
    expect(v).toBeCloseTo(0.25 ** 0.3, 14);
  });
});
