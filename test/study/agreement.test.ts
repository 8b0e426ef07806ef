import { describe, expect, test } from 'vitest';
import type { Scenario } from '../../src/scenario/scenario.ts';
import type { RunResult } from '../../src/study/result.ts';
import { run } from '../../src/study/run.ts';
import { scenario } from '../support/plants.ts';

const plants = [
  'ten',
  'saltbush-copper',
  'wattle-acid-ratio',
  'wattle-acid-table',
  'mulga-two-metals',
  'saltbush-tank-house',
];
const TOLERANCE = 1e-8;

/** Largest difference of two runs over all records and outputs, in units of the tolerance that both were run at. */
function units(a: RunResult, b: RunResult): number {
  expect(a.stop.reason).toBe('reached-end');
  expect(b.stop.reason).toBe('reached-end');
  expect(a.records.times).toEqual(b.records.times);
  const { outputs } = a.plant.system;
  let worst = 0;
  a.records.rows.forEach((row, i) => {
    outputs.forEach(({ scale }, k) => {
      const [v, w] = [row[k], b.records.rows[i][k]];
      const one = TOLERANCE * (Math.max(Math.abs(v), Math.abs(w)) + 0.01 * scale);
      worst = Math.max(worst, Math.abs(v - w) / one);
    });
  });
  return worst;
}

describe.each(plants)('%s', (name) => {
  const s = scenario(name);

  test('Rodas5P and Rodas4 agree over the whole scenario', () => {
    const five = run(s, { integrator: 'rodas5p', tolerance: TOLERANCE });
    const four = run(s, { integrator: 'rodas4', tolerance: TOLERANCE });
    expect(units(five, four)).toBeLessThan(3);
    expect(five.work.steps).toBeLessThan(four.work.steps);
  });

  // The explicit method shares neither Jacobian nor step formulas with the others. Its cost grows with stiffness, so
  // it follows the first hour only, with a ramp, a jump and a stopped mixer in it.
  const first: Scenario = {
    ...s,
    horizon: 3600,
    recordEvery: 300,
    upsets: [
      {
        at: 900,
        quantity: `${s.feeds[0].name}.${s.solutes[0]}`,
        how: { by: 0.3, relative: true },
        over: 600,
        lasts: 1500,
        words: '',
      },
      {
        at: 1200,
        quantity: `${s.feeds[1].name}.flow`,
        how: { by: -0.2, relative: true },
        over: 0,
        lasts: null,
        words: '',
      },
      { at: 1800, quantity: `${s.trains[0].name}.1.mixer`, how: { to: 0 }, over: 0, lasts: 300, words: '' },
    ],
  };

  test('odex, two digits finer, agrees with both over the first hour', () => {
    const explicit = run(first, { integrator: 'odex', tolerance: TOLERANCE / 100 });
    for (const integrator of ['rodas5p', 'rodas4'])
      expect(units(run(first, { integrator, tolerance: TOLERANCE }), explicit)).toBeLessThan(5);
  });

  test('odex at the same tolerance agrees to two digits less', () => {
    const explicit = run(first, { integrator: 'odex', tolerance: TOLERANCE });
    const implicit = run(first, { integrator: 'rodas5p', tolerance: TOLERANCE });
    expect(units(implicit, explicit)).toBeLessThan(300);
  });

  test('recording more often changes no figure of the run', () => {
    const settings = { integrator: 'rodas5p', tolerance: 1e-6 };
    const seldom = run(s, settings);
    const often = run({ ...s, recordEvery: s.recordEvery / 4 }, settings);
    expect(often.work).toEqual(seldom.work);
    seldom.records.rows.slice(0, -1).forEach((row, i) => {
      expect(often.records.rows[4 * i]).toEqual(row);
    });
  });
});
