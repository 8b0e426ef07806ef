import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { interpreted } from '../../src/math/kernel.ts';
import { assemble, type Plant } from '../../src/plant/assemble.ts';
import {
  noProperties,
  plainCircuit,
  plainMixer,
  plainSettler,
  plainStage,
  plainTank,
  plainTrain,
} from '../../src/scenario/plain.ts';
import type { Law, Phase, Scenario, Train } from '../../src/scenario/scenario.ts';
import type { F, Pattern } from '../../src/solve/system.ts';
import { fromText } from '../support/plants.ts';
import { anyCircuit } from './any-circuit.ts';
import { anyPlant, bent } from './any-plant.ts';

/*
 * Jacobians are exact derivatives of the very expressions that make the right-hand side, so central differences of
 * the one must give the other at any state, sensible or not.
 */
const laws: Record<string, Law> = {
  ratio: { law: 'ratio', ratio: 1.7 },
  langmuir: { law: 'langmuir', capacity: 14, affinity: 0.6 },
  concave: { law: 'freundlich', coefficient: 2.5, exponent: 0.6 },
  convex: { law: 'freundlich', coefficient: 0.4, exponent: 1.5 },
  table: { law: 'table', aqueous: [0, 1, 3, 7, 15], organic: [0, 2.2, 5, 8, 11] },
  exchange: { law: 'exchange', constant: 9, extractant: 12, perSolute: 1.1, p: 2, q: 1.5, acid: 0 },
  formula: { law: 'formula', organic: bent(6, 0.4, 0.02), constants: {} },
};

const DESIGN = 0.02;

/** Two stages, two solutes, a feed tank whose level moves, organic round a loop through a tank. */
function plantOf(first: Law, second: Law | null, side: Phase, moving: boolean): Plant {
  const transfers = [
    { given: 'efficiency', efficiency: 0.8 },
    { given: 'ka', ka: 0.05, fixed: true },
    { given: 'ka', ka: 0.02, fixed: false },
  ] as const;
  const train = (
    name: string,
    aqueous: Train['aqueous'],
    organic: Train['organic'],
    stages: number,
  ): Train => ({
    name,
    aqueous,
    organic,
    stages: Array.from({ length: stages }, (_, j) => ({
      mixer: {
        volume: 5 + j,
        continuity: j === 0 ? 'aqueous' : 'organic',
        side,
        transfer: transfers[j % 3],
        ...plainMixer,
      },
      settler: { aqueous: 12, organic: 9 + j, parts: 2, area: null, ...plainSettler },
      ...plainStage,
    })),
    equilibrium: [first, second],
    initial: { aqueous: 'as entering', organic: 'as entering' },
    ...plainTrain,
  });
  const s: Scenario = {
    title: '',
    about: '',
    solutes: ['red', 'blue'],
    species: ['acid'],
    ...plainCircuit,
    properties: noProperties(2),
    feeds: [
      { name: 'liquor', phase: 'aqueous', flow: DESIGN, content: [5, 2, 40] },
      { name: 'strong', phase: 'aqueous', flow: DESIGN / 2, content: [1, 0.5, 150] },
    ],
    tanks: [
      {
        name: 'surge',
        phase: 'aqueous',
        from: 'liquor',
        to: 'fed',
        volume: 60,
        held: 25,
        flow: DESIGN,
        content: [4, 1, 35],
        ...plainTank,
      },
      {
        name: 'loop',
        phase: 'organic',
        from: 'lean',
        to: 'pumped',
        volume: 40,
        held: 20,
        flow: DESIGN,
        content: [3, 1, 0],
        ...plainTank,
      },
    ],
    trains: [
      train('extraction', { from: 'fed', to: 'raffinate' }, { from: 'pumped', to: 'loaded' }, 3),
      train('strip', { from: 'strong', to: 'product' }, { from: 'loaded', to: 'lean' }, 1),
    ],
    releases: [[1.5], [0.7]],
    start: 'barren',
    horizon: 3600,
    recordEvery: 3600,
    upsets: [],
    limits: [],
  };
  return assemble(s, { moving: new Set(moving ? ['liquor.flow', 'loop.flow', 'strong.flow'] : []) });
}

/**
 * A small generator of its own, so that states do not depend on the order of tests: S. K. Park, K. W. Miller and P. K.
 * Stockmeyer, Commun. ACM 36(7), 108 (1993) (from memory).
 */
function random(seed: number): () => number {
  let s = seed;
  return () => {
    s = (s * 48271) % 2147483647;
    return s / 2147483647;
  };
}

/** A state with every place somewhere in its range, and inputs off design. */
function somewhere(plant: Plant, seed: number): { x: F; w: F } {
  const next = random(seed);
  const x = plant.barren.map((v, i) => {
    const { kind, scale, path } = plant.system.places[i];
    if (kind === 'total') return -next();
    if (kind === 'volume') return v * (0.8 + 0.3 * next());
    // The species' carrier holds what the solutes would still set free on top.
    return 100 * scale * (path.endsWith('acid') ? 0.5 + next() : 0.05 + 0.4 * next());
  });
  const w = plant.inputs.map((v) => v * (0.8 + 0.4 * next()));
  return { x, w };
}

function dense(p: Pattern, values: F, rows: number, columns: number): number[][] {
  const m = Array.from({ length: rows }, () => new Array<number>(columns).fill(0));
  for (let i = 0; i < rows; i++)
    for (let k = p.rowStart[i]; k < p.rowStart[i + 1]; k++) m[i][p.column[k]] = values[k];
  return m;
}

/**
 * Largest error of a matrix against central differences of f, relative to the largest term of its row. `least` is the
 * size below which a row is nothing but rounding: a mean of equal streams does not change with their flow.
 */
function worst(
  matrix: number[][],
  at: F,
  scales: readonly number[],
  f: (v: F) => F,
  step: number,
  least: readonly number[],
): number {
  let found = 0;
  const size = matrix.map((row, i) =>
    Math.max(least[i], ...row.map((v, j) => Math.abs(v) * (Math.abs(at[j]) + scales[j]))),
  );
  at.forEach((v, j) => {
    const unit = Math.abs(v) + scales[j];
    const h = step * unit;
    const [up, down] = [1, -1].map((sign) => f(at.map((q, k) => (k === j ? q + sign * h : q))));
    matrix.forEach((row, i) => {
      const difference = (up[i] - down[i]) / (2 * h);
      const error = Math.abs(difference - row[j]) * unit;
      if (error > 0) found = Math.max(found, error / size[i]);
    });
  });
  return found;
}

/** All four matrices of a plant at one state. */
function check(plant: Plant, x: F, w: F, step = 1e-5, tolerance = 1e-6): void {
  const { system, parameters: p } = plant;
  const [nx, nw, ny] = [system.places.length, system.inputs.length, system.outputs.length];
  const states = system.places.map((q) => q.scale);
  const inputs = system.inputs.map((q) => q.scale * 0.01);
  const values = (q: Pattern): F => new Float64Array(q.column.length);
  const [a, b, c, d] = [system.A, system.B, system.C, system.D].map(values);
  system.jacobian(x, w, p, a);
  system.byInput(x, w, p, b);
  system.byOutput(x, w, p, c, d);
  const rhs = (xx: F, ww: F): F => {
    const f = new Float64Array(nx);
    system.rhs(xx, ww, p, f);
    return f;
  };
  const output = (xx: F, ww: F): F => {
    const y = new Float64Array(ny);
    system.output(xx, ww, p, y);
    return y;
  };
  const least = system.outputs.map((o) => 1e-5 * o.scale);
  const agrees = (what: string, m: number[][], at: F, scales: readonly number[], f: (v: F) => F): void => {
    const rows = what.startsWith('outputs') ? least : m.map(() => 1e-30);
    expect(worst(m, at, scales, f, step, rows), what).toBeLessThan(tolerance);
  };
  agrees('rates by state', dense(system.A, a, nx, nx), x, states, (v) => rhs(v, w));
  agrees('rates by input', dense(system.B, b, nx, nw), w, inputs, (v) => rhs(x, v));
  agrees('outputs by state', dense(system.C, c, ny, nx), x, states, (v) => output(v, w));
  agrees('outputs by input', dense(system.D, d, ny, nw), w, inputs, (v) => output(x, v));
}

describe('derivatives are those of the balances', () => {
  const cases = Object.keys(laws).flatMap((name) =>
    (['aqueous', 'organic'] as const).flatMap((side) =>
      [true, false].map((moving) => ({ name, side, moving })),
    ),
  );

  test.each(cases)('$name, $side side, flows that move: $moving', ({ name, side, moving }) => {
    // The second solute competes under the same law where it can; elsewhere it has another.
    const law = laws[name];
    const second = name === 'langmuir' || name === 'exchange' ? law : laws.ratio;
    const plant = plantOf(law, second, side, moving);
    expect(plant.system.places.some((q) => q.path === 'extraction.1.mixer.organic.volume')).toBe(true);
    for (const seed of [11, 12]) {
      const { x, w } = somewhere(plant, seed);
      check(plant, x, w);
    }
  });
});

test('without moving flows the hold-ups are no states, and derivatives hold all the same', () => {
  const { scenario } = plantOf(laws.langmuir, laws.langmuir, 'aqueous', false);
  // The feed straight to the train: no level can move, no pump can stop.
  const plant = assemble({
    ...scenario,
    tanks: scenario.tanks.slice(1),
    trains: scenario.trains.map((t) =>
      t.name === 'strip' ? t : { ...t, aqueous: { ...t.aqueous, from: 'liquor' } },
    ),
  });
  expect(plant.system.places.some((q) => q.kind === 'volume')).toBe(false);
  const { x, w } = somewhere(plant, 13);
  check(plant, x, w);
});

test('streams that divide and meet, side feeds, draws, removal, base, cells, a batch: derivatives hold', () => {
  const law = (ratio: number): string =>
    `{red: {law: langmuir, capacity: 12 g/L, affinity: ${ratio} L/g}, blue: {law: langmuir, capacity: 9 g/L, affinity: 0.3 L/g}}`;
  const plant = assemble(
    fromText(`
title: All of it
solutes: [red, blue]
species: [acid]
feeds:
  liquor: {phase: aqueous, flow: 40 m^3/h, red: 5 g/L, blue: 3 g/L, acid: 2 g/L}
  strong: {phase: aqueous, flow: 6 m^3/h, red: 0.2 g/L, blue: 0.1 g/L, acid: 150 g/L}
  base: {phase: aqueous, flow: 1 m^3/h, red: 0.1 g/L, blue: 0.3 g/L, neutralises: {acid: 20 g/L}}
splits:
  liquor: {one liquor: 60 %, two liquor: rest}
  stripped: {bleed: 0.5 m^3/h, kept: rest}
blends:
  out: [one raffinate, two raffinate]
tanks:
  loop: {phase: organic, from: kept, to: pumped, volume: 40 m^3, filled: 50 %, flow: 30 m^3/h, red: 1 g/L}
  house: {phase: aqueous, from: rich, to: sent, volume: 20 m^3, filled: 50 %, flow: 6 m^3/h, red: 9 g/L, removes: {red: 20 kg/h, blue: 30 %}, returns: {blue: {acid: 0.4}}}
trains:
  one:
    stages: 3
    aqueous: one liquor -> one raffinate
    organic: half -> loaded
    mixer: {volume: 2 m^3, ka: 0.02 1/s}
    settler: none
    back_flow: {aqueous: 60 %, organic: 20 %}
    equilibrium: ${law(1.1)}
    stage 2: {takes: base, draws: {sample: {phase: aqueous, take: 2 m^3/h}, more: {phase: aqueous, take: 5 %}}}
  two:
    stages: 2
    arrangement: cross-current
    fresh: organic
    aqueous: two liquor -> two raffinate
    organic: pumped -> half
    mixer: {volume: 2 m^3, stage_efficiency: 80 %}
    settler: {aqueous_volume: 4 m^3, organic_volume: 4 m^3}
    equilibrium: ${law(0.8)}
  strip:
    stages: 2
    arrangement: co-current
    aqueous: strong -> rich
    organic: loaded -> stripped
    mixer: {volume: 2 m^3, stage_efficiency: 80 %}
    settler: {aqueous_volume: 4 m^3, organic_volume: 4 m^3}
    equilibrium: ${law(0.1)}
batches:
  beaker: {mixer: {volume: 1 L, organic_share: 40 %, ka: 0.01 1/s}, aqueous: {red: 3 g/L, blue: 1 g/L, acid: 1 g/L}, equilibrium: ${law(1)}}
horizon: 1 h
limits:
  - {keep: out.purity of red, below: 60 %}
  - {keep: out.red / bleed.red, below: 2}
`),
    {
      moving: new Set([
        'liquor.flow',
        'one liquor.share',
        'bleed.flow',
        'sample.flow',
        'house.removal of red',
      ]),
    },
  );
  for (const seed of [21, 22, 23]) {
    const { x, w } = somewhere(plant, seed);
    check(plant, x, w);
  }
});

test('nearly empty vessels and vanishing phases: derivatives hold there too', () => {
  const plant = plantOf(laws.exchange, laws.exchange, 'aqueous', true);
  const { x, w } = somewhere(plant, 14);
  const at = (path: string): number => plant.system.places.findIndex((q) => q.path === path);
  const volume = at('extraction.2.mixer.organic.volume');
  const surge = at('surge.volume');
  for (const share of [1 - 5e-4, 1 - 5e-5, 5e-4, 5e-5]) {
    x[volume] = 6 * share;
    x[surge] = 0.3;
    // Contents that go with the volumes, so that concentrations stay what they are.
    for (const q of ['red', 'blue', 'acid']) {
      x[at(`extraction.2.mixer.aqueous.${q}`)] = (q === 'acid' ? 60 : 2) * 6 * (1 - share);
      if (q !== 'acid') x[at(`extraction.2.mixer.organic.${q}`)] = 2 * 6 * share;
      x[at(`surge.aqueous.${q}`)] = (q === 'acid' ? 60 : 2) * 0.3;
    }
    // What is left of a phase is small beside the hold-up that is moved, so the differences are finer and less exact.
    check(plant, x, w, 2e-8, 3e-5);
  }
});

test('generated code and the node-by-node oracle give the same figures to the last bit', () => {
  fc.assert(
    fc.property(fc.oneof(anyPlant, anyCircuit), fc.integer({ min: 1, max: 1e6 }), (s, seed) => {
      const fast = assemble(s);
      const slow = assemble(s, { execution: interpreted });
      expect(slow.system.topology).toBe(fast.system.topology);
      const { x, w } = somewhere(fast, seed);
      const both = (sizes: number[], call: (q: Plant, out: F[]) => void): void => {
        const [one, other] = [fast, slow].map((q) => {
          const out = sizes.map((n) => new Float64Array(n));
          call(q, out);
          return out;
        });
        expect(other).toEqual(one);
      };
      const { A, B, C, D, places, outputs, guards } = fast.system;
      both([places.length], (q, [f]) => q.system.rhs(x, w, q.parameters, f));
      both([A.column.length], (q, [v]) => q.system.jacobian(x, w, q.parameters, v));
      both([B.column.length], (q, [v]) => q.system.byInput(x, w, q.parameters, v));
      both([outputs.length], (q, [y]) => q.system.output(x, w, q.parameters, y));
      both([C.column.length, D.column.length], (q, [c, d]) => q.system.byOutput(x, w, q.parameters, c, d));
      both([guards.length], (q, [g]) => q.system.guard(x, w, q.parameters, g));
    }),
    { seed: 1988, numRuns: 40, endOnFailure: true },
  );
});
