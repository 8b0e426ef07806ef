import { describe, expect, test } from 'vitest';
import { isotherm } from '../../src/plant/isotherm.ts';
import { steady } from '../../src/study/steady.ts';
import { scenario } from '../support/plants.ts';
import { cascade, reader, unitsOfTransfer } from './cascade.ts';

describe('the operating diagram at steady state', () => {
  const s = cascade({
    stages: 4,
    aqueous: 0.03,
    organic: 0.02,
    feed: 5,
    solvent: 0.1,
    law: { law: 'langmuir', capacity: 12, affinity: 0.6 },
    transfer: unitsOfTransfer(1e6, 0.03, 0.02),
  });
  const { diagrams, plant, outputs } = steady(s);
  const [{ train, solute, along, moments }] = diagrams;
  const [moment] = moments;
  const read = reader(plant);

  test('is drawn for the train and its solute', () => {
    expect(diagrams).toHaveLength(1);
    expect([train, solute, along]).toEqual(['train', 's', 'isotherm']);
    expect(moments).toHaveLength(1);
  });

  test('the streams between the stages lie on the line of slope Q_a/Q_o through both ends', () => {
    const { operating } = moment;
    expect(operating).toHaveLength(5);
    expect(operating[0]).toEqual({ x: 5, y: read(outputs, 'extract.s') });
    expect(operating[4]).toEqual({ x: read(outputs, 'raffinate.s'), y: 0.1 });
    for (const { x, y } of operating) expect(y - 0.1).toBeCloseTo(1.5 * (x - operating[4].x), 9);
  });

  test('stages near equilibrium lie on the isotherm', () => {
    const curve = isotherm(plant, s.trains[0], 0, [5]);
    for (const { x, y } of moment.stages) expect(Math.abs(curve(x) / y - 1)).toBeLessThan(1e-5);
  });

  test('the isotherm starts at zero, rises, and reaches beyond the feed', () => {
    const { isotherm: points } = moment;
    expect(points[0]).toEqual({ x: 0, y: 0 });
    points.slice(1).forEach(({ x, y }, i) => {
      expect(x).toBeGreaterThan(points[i].x);
      expect(y).toBeGreaterThan(points[i].y);
      expect(y).toBeCloseTo((12 * 0.6 * x) / (1 + 0.6 * x), 9);
    });
    expect(points[points.length - 1].x).toBeGreaterThan(5);
  });
});

test('an exchange isotherm is drawn along the acid that the transfer itself sets free', () => {
  const { diagrams, plant } = steady(scenario('saltbush-copper'));
  const [extraction, strip] = diagrams;
  expect(extraction.along).toBe('isotherm at the acid that the transfer itself sets free');
  // c_o from c_o = 16·F²·c_a/acid² with F = 10.5 − c_o and acid = 1.8 + 1.543·(5.2 − c_a): a quadratic in c_o.
  const curve = isotherm(plant, plant.scenario.trains[0], 0, [5.2, 1.8]);
  for (const ca of [0.1, 0.5, 2, 5]) {
    const k = (16 * ca) / (1.8 + 1.543 * (5.2 - ca)) ** 2;
    const b = 21 + 1 / k;
    expect(curve(ca)).toBeCloseTo((b - Math.sqrt(b * b - 4 * 10.5 ** 2)) / 2, 9);
  }
  // In the strip copper passes the other way: its acid falls from 185 as copper rises above 35 g/L.
  const points = strip.moments[0].isotherm;
  const { x, y } = points[points.length - 1];
  const k = (16 * x) / (185 - 1.543 * (x - 35)) ** 2;
  expect(y).toBeCloseTo(k * (10.5 - y) ** 2, 6);
});
