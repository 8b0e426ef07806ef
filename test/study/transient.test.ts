import { describe, expect, test } from 'vitest';
import type { Change } from '../../src/scenario/scenario.ts';
import { cascade, reader, runToEnd } from './cascade.ts';
import { LinearModel, type Piece } from './linear-cascade.ts';

const exact = { integrator: 'rodas5p', tolerance: 1e-9 };

describe('a linear cascade follows the matrix exponential', () => {
  const plants = [
    { name: 'one stage, finite k·a', stages: 1, parts: 1, D: 2, ka: 0.02, ratio: 1.2 },
    { name: 'four stages, finite k·a', stages: 4, parts: 1, D: 0.75, ka: 0.015, ratio: 2 },
    { name: 'three stages, three parts a layer', stages: 3, parts: 3, D: 1.5, ka: 0.03, ratio: 0.7 },
    { name: 'six stages next to equilibrium', stages: 6, parts: 1, D: 1.1, ka: 200, ratio: 0.9 },
    { name: 'two stages next to equilibrium, two parts', stages: 2, parts: 2, D: 5, ka: 1000, ratio: 0.4 },
  ];
  const every = 60;
  const feed = 10;
  const solvent = 0.5;
  /** From barren; then the feed jumps up, comes down along a ramp, and stays. */
  const pieces: Piece[] = [
    { from: feed, slope: 0, lasts: 7200 },
    { from: 14, slope: 0, lasts: 3600 },
    { from: 14, slope: -8 / 1800, lasts: 1800 },
    { from: 6, slope: 0, lasts: 5400 },
  ];
  const course: Change = {
    at: 7200,
    quantity: 'feed.s',
    how: {
      follow: {
        times: [7200, 10800, 12600],
        values: [14, 14, 6],
      },
    },
    over: 0,
    lasts: null,
    words: '',
  };

  test.each(plants)('$name', ({ stages, parts, D, ka, ratio }) => {
    const aqueous = 0.05;
    const c = {
      stages,
      parts,
      aqueous,
      organic: aqueous * ratio,
      mixer: 12,
      layers: { aqueous: 30, organic: 25 },
    };
    const s = cascade({
      ...c,
      feed,
      solvent,
      law: { law: 'ratio', ratio: D },
      transfer: { given: 'ka', ka, fixed: false },
      horizon: 18_000,
      recordEvery: every,
      upsets: [course],
    });
    const { result } = runToEnd(s, exact);
    const model = new LinearModel({ ...c, D, ka });
    const initial = Array.from({ length: model.size }, () => 0);
    for (let j = 0; j < stages; j++)
      for (let k = 0; k <= parts; k++) initial[model.at(j, 'organic', k)] = solvent;
    const states = model.follow(initial, solvent, pieces, every);
    expect(result.records.times.length).toBe(states.length);
    const read = reader(result.plant);
    let worst = 0;
    result.records.rows.forEach((row, i) => {
      for (let j = 0; j < stages; j++)
        for (const phase of ['aqueous', 'organic'] as const)
          for (const [unit, part] of [
            ['mixer', 0],
            ['settler', parts],
          ] as const) {
            const known = states[i][model.at(j, phase, part)];
            const found = read(row, `train.${j + 1}.${unit}.${phase}.s`);
            // Far ahead of a front there is next to nothing: there, a millionth of a thousandth of the feed counts.
            worst = Math.max(worst, Math.abs(found - known) / Math.max(known, 1e-3 * feed));
          }
    });
    expect(worst).toBeLessThan(1e-6);
  });
});
