import { describe, expect, test } from 'vitest';
import type { RunResult } from '../../src/study/result.ts';
import { run } from '../../src/study/run.ts';
import { steady } from '../../src/study/steady.ts';
import { fromText } from '../support/plants.ts';
import { reader } from './cascade.ts';

const fine = { integrator: 'rodas5p', tolerance: 1e-9 } as const;

const HEAD = `
title: Circuit
solutes: [copper]
species: [acid]
horizon: 8 h
record_every: 15 min
`;
const LAW = '{copper: {law: exchange, constant: 16, extractant: 10.5 g/L, releases: {acid: 1.543}}}';
const feeds = (more = ''): string => `
feeds:
  liquor: {phase: aqueous, flow: 400 m^3/h, copper: 5 g/L, acid: 2 g/L}
  organic: {phase: organic, flow: 400 m^3/h, copper: 2 g/L}
${more}`;
const train = (name: string, way: string, scale: number, more = ''): string => `
  ${name}:
    stages: 3
    ${way}
    mixer: {volume: ${40 * scale} m^3, continuity: organic, stage_efficiency: 92 %}
    settler: {aqueous_volume: ${60 * scale} m^3, organic_volume: ${50 * scale} m^3, tanks_in_series: 2}
    equilibrium: ${LAW}
${more}`;
const UPSETS = `
upsets:
  - {at: 4 h, change: liquor.copper, by: +30 %, over: 20 min}
  - {at: 5 h, change: liquor.flow, by: +10 %, for: 1 h}
`;
const alone = `${HEAD}${feeds()}
trains:
${train('a', 'aqueous: liquor -> raffinate\n    organic: organic -> loaded', 1)}${UPSETS}`;

/** Largest difference of a stream over two runs, relative. */
function apart(x: RunResult, y: RunResult, pairs: readonly (readonly [string, string])[]): number {
  const [a, b] = [reader(x.plant), reader(y.plant)];
  let worst = 0;
  x.records.rows.forEach((row, k) => {
    for (const [p, q] of pairs) {
      const [v, w] = [a(row, p), b(y.records.rows[k], q)];
      worst = Math.max(worst, Math.abs(v - w) / (Math.abs(v) + 1e-3));
    }
  });
  return worst;
}

describe('the same plant written in two ways runs the same course', () => {
  const single = run(fromText(alone), fine);

  test('two trains in parallel, each with half of both streams in vessels of half the size', () => {
    const s = `${HEAD}${feeds()}
splits:
  liquor: {left liquor: 50 %, right liquor: rest}
  organic: {left organic: rest, right organic: 200 m^3/h}
blends:
  raffinate: [left raffinate, right raffinate]
  loaded: [left loaded, right loaded]
trains:
${train('left', 'aqueous: left liquor -> left raffinate\n    organic: left organic -> left loaded', 0.5)}${train('right', 'aqueous: right liquor -> right raffinate\n    organic: right organic -> right loaded', 0.5)}${UPSETS}`;
    const pairs = ['raffinate.copper', 'raffinate.acid', 'loaded.copper', 'raffinate.flow'];
    expect(
      apart(
        single,
        run(fromText(s), fine),
        pairs.map((p) => [p, p] as const),
      ),
    ).toBeLessThan(1e-6);
  });

  test('a second liquor into stage 1 from the side, or blended with the first', () => {
    const second = '  second: {phase: aqueous, flow: 50 m^3/h, copper: 9 g/L, acid: 6 g/L}';
    const way = (from: string): string => `aqueous: ${from} -> raffinate\n    organic: organic -> loaded`;
    const side = run(
      fromText(`${HEAD}${feeds(second)}
trains:
${train('a', way('liquor'), 1, '    stage 1: {takes: second}')}
    initial: {aqueous: {acid: 3 g/L}}${UPSETS}`),
      fine,
    );
    const blended = run(
      fromText(`${HEAD}${feeds(second)}
blends: {both: [liquor, second]}
trains:
${train('a', way('both'), 1)}
    initial: {aqueous: {acid: 3 g/L}}${UPSETS}`),
      fine,
    );
    expect(
      apart(side, blended, [
        ['raffinate.copper', 'raffinate.copper'],
        ['loaded.copper', 'loaded.copper'],
        ['raffinate.acid', 'raffinate.acid'],
      ]),
    ).toBeLessThan(1e-6);
    for (const c of side.closures) expect(c.closure, c.name).toBeLessThan(1e-12);
  });

  test('drawn off the last stage, or split off the raffinate', () => {
    const way = 'aqueous: liquor -> raffinate\n    organic: organic -> loaded';
    const drawn = run(
      fromText(`${HEAD}${feeds()}
trains:
${train('a', way, 1, '    stage 3: {draws: {pond: {phase: aqueous, take: 30 m^3/h}}}')}${UPSETS}`),
      fine,
    );
    const divided = run(
      fromText(`${HEAD}${feeds()}
splits: {raffinate: {pond: 30 m^3/h, out: rest}}
trains:
${train('a', way, 1)}${UPSETS}`),
      fine,
    );
    expect(
      apart(drawn, divided, [
        ['raffinate.flow', 'out.flow'],
        ['pond.flow', 'pond.flow'],
        ['pond.copper', 'pond.copper'],
      ]),
    ).toBeLessThan(1e-12);
    expect(apart(drawn, single, [['raffinate.copper', 'raffinate.copper']])).toBeLessThan(1e-6);
    const read = reader(drawn.plant);
    for (const row of drawn.records.rows) expect(read(row, 'pond.flow')).toBeCloseTo(30 / 3600, 12);
  });

  test('a loop that divides and runs together again keeps its tank where it was, and makes no level of it', () => {
    const strip = (n: string): string =>
      train(`strip ${n}`, `aqueous: acid ${n} -> rich ${n}\n    organic: ${n} -> lean ${n}`, 0.5);
    const plant = fromText(`${HEAD}
feeds:
  liquor: {phase: aqueous, flow: 400 m^3/h, copper: 5 g/L, acid: 2 g/L}
  strip acid: {phase: aqueous, flow: 120 m^3/h, acid: 180 g/L}
tanks:
  tank: {phase: organic, from: lean, to: organic, volume: 200 m^3, filled: 50 %, flow: 400 m^3/h}
splits:
  loaded: {one: 35 %, two: rest}
  strip acid: {acid one: 35 %, acid two: rest}
blends:
  lean: [lean one, lean two]
  rich: [rich one, rich two]
trains:
${train('extraction', 'aqueous: liquor -> raffinate\n    organic: organic -> loaded', 1)}${strip('one')}${strip('two')}`);
    const r = run(plant, fine);
    expect(r.plant.system.places.some((p) => p.path === 'tank.volume')).toBe(false);
    for (const c of r.closures) expect(c.closure, c.name).toBeLessThan(1e-12);
    const rest = steady(plant);
    const read = reader(rest.plant);
    const metal = 400 * read(rest.outputs, 'raffinate.copper') + 120 * read(rest.outputs, 'rich.copper');
    expect(metal / 2000).toBeCloseTo(1, 9);
  });
});

/** Extraction on fresh organic; a strip liquor that circulates over a tank in which metal is taken out. */
const house = (removes: string, more = ''): string => `${HEAD.replace('8 h', '60 h')}
feeds:
  loaded: {phase: organic, flow: 400 m^3/h, copper: 6 g/L}
tanks:
  house: {phase: aqueous, from: rich, to: spent, volume: 300 m^3, flow: 120 m^3/h, copper: 38 g/L, acid: 170 g/L, removes: {copper: ${removes}}${more}}
trains:
${train('strip', 'aqueous: spent -> rich\n    organic: loaded -> stripped', 0.6)}
    initial: {aqueous: as entering}
`;

describe('a strip liquor closed over a removal', () => {
  test('at rest what is stripped is what is taken out, and the acid is that of the start', () => {
    const r = steady(fromText(house('1500 kg/h')));
    const read = reader(r.plant);
    const [rich, spent] = ['rich.copper', 'spent.copper'].map((p) => read(r.outputs, p));
    expect(120 * (rich - spent)).toBeCloseTo(1500, 6);
    expect(400 * (6 - read(r.outputs, 'stripped.copper'))).toBeCloseTo(1500, 6);
    expect(3600 * read(r.outputs, 'house.removal of copper')).toBeCloseTo(1500, 9);
    // The electrolysis of Cu²⁺ gives back the H₂SO₄ that the stripping took: 98.08/63.55 = 1.543 g/g (stoichiometry).
    expect(read(r.outputs, 'spent.acid') - read(r.outputs, 'rich.acid')).toBeCloseTo(
      1.543 * (rich - spent),
      6,
    );
  });

  test('a share: of what flows in that much does not flow out', () => {
    const r = steady(fromText(house('20 %')));
    const read = reader(r.plant);
    expect(read(r.outputs, 'spent.copper') / read(r.outputs, 'rich.copper')).toBeCloseTo(0.8, 7);
  });

  test('balances close on the way, with what was taken out among what left', () => {
    const r = run(fromText(house('1500 kg/h')), fine);
    for (const c of r.closures) expect(c.closure, c.name).toBeLessThan(1e-12);
    const copper = r.closures.find((c) => c.name === 'copper') as (typeof r.closures)[number];
    expect(copper.left).toBeGreaterThan(1500 * 60 * 0.99);
  });

  test('another return of acid is what it says: nothing given back lets the acid fall', () => {
    const text = house('1500 kg/h', ', returns: {copper: {acid: 0}}').replace('60 h', '4 h');
    const r = run(fromText(text), fine);
    const read = reader(r.plant);
    const last = r.records.rows[r.records.rows.length - 1];
    // The stripping takes 1.543 kg of acid per kg of metal out of the liquor, and nothing puts it back.
    const balance = r.closures.find((c) => c.name === 'acid') as (typeof r.closures)[number];
    expect(balance.closure).toBeLessThan(1e-12);
    expect(balance.left / (1.543 * 1500 * 4)).toBeCloseTo(1, 2);
    expect(read(last, 'spent.acid')).toBeLessThan(160);
  });

  test('nothing is taken out of an empty liquor', () => {
    const text = house('1500 kg/h').replace('copper: 6 g/L', 'copper: 0 g/L');
    const r = run(fromText(text), { integrator: 'rodas5p', tolerance: 1e-6 });
    expect(r.complete).toBe(true);
    const read = reader(r.plant);
    const last = r.records.rows[r.records.rows.length - 1];
    expect(read(last, 'spent.copper')).toBeGreaterThanOrEqual(0);
    expect(read(last, 'spent.copper')).toBeLessThan(0.4);
    expect(3600 * read(last, 'house.removal of copper')).toBeLessThan(20);
  });
});

describe('base dosed to a mixer', () => {
  const dosed = (
    flow: number,
  ): string => `${HEAD}${feeds(`  caustic: {phase: aqueous, flow: ${flow} m^3/h, neutralises: {acid: 120 g/L}}`)}
trains:
${train('a', 'aqueous: liquor -> raffinate\n    organic: organic -> loaded', 1, '    stage 3: {takes: caustic}')}`;

  test('takes as much acid as it says, and the extraction goes further', () => {
    const [with_, without] = [dosed(10), alone.replace(UPSETS, '')].map((t) => steady(fromText(t)));
    const of = (r: typeof with_, p: string): number => reader(r.plant)(r.outputs, p);
    const moved = 400 * (of(with_, 'loaded.copper') - 2);
    expect(410 * of(with_, 'raffinate.acid')).toBeCloseTo(400 * 2 + 1.543 * moved - 1200, 5);
    expect(of(with_, 'raffinate.copper')).toBeLessThan(0.7 * of(without, 'raffinate.copper'));
    expect(with_.imbalance).toBeLessThan(1e-9);
  });

  test('more than there is of the acid is an event with its time, and the run goes on', () => {
    const r = run(fromText(dosed(60)), { integrator: 'rodas5p', tolerance: 1e-6 });
    expect(r.complete).toBe(true);
    expect(r.events.map((e) => e.message).join('\n')).toMatch(
      /acid in a\.3\.mixer is used up: more base is dosed/,
    );
    for (const c of r.closures) expect(c.closure, c.name).toBeLessThan(1e-9);
  });
});

describe('shares and flows that change', () => {
  test('a branch by flow takes all there is where there is less, and never more', () => {
    const s = `${HEAD}${feeds()}
splits:
  liquor: {first: 300 m^3/h, second: 20 %, a liquor: rest}
trains:
${train('a', 'aqueous: a liquor -> raffinate\n    organic: organic -> loaded', 1)}
upsets:
  - {at: 2 h, change: liquor.flow, to: 200 m^3/h, over: 30 min, for: 2 h}
  - {at: 6 h, change: second.share, to: 90 %}
`;
    const r = run(fromText(s), { integrator: 'rodas5p', tolerance: 1e-7 });
    const read = reader(r.plant);
    const flows = (h: number): number[] => {
      const row = r.records.rows[r.records.times.indexOf(h * 3600)];
      return ['first', 'second', 'a liquor'].map((n) => 3600 * read(row, `${n}.flow`));
    };
    const near = (h: number, list: readonly number[]): void => {
      for (const [i, v] of flows(h).entries()) expect(v).toBeCloseTo(list[i], 6);
    };
    near(1, [300, 80, 20]);
    near(3, [200, 0, 0]);
    near(7, [300, 100, 0]);
    for (const c of r.closures) expect(c.closure, c.name).toBeLessThan(1e-9);
  });

  test('a bleed empties its tank, and the tank says when', () => {
    const s = `${HEAD}
feeds:
  liquor: {phase: aqueous, flow: 400 m^3/h, copper: 5 g/L, acid: 2 g/L}
tanks:
  tank: {phase: organic, from: kept, to: organic, volume: 100 m^3, filled: 50 %, flow: 400 m^3/h}
splits: {loaded: {bleed: 10 m^3/h, kept: rest}}
trains:
${train('a', 'aqueous: liquor -> raffinate\n    organic: organic -> loaded', 1)}`;
    const r = run(fromText(s), { integrator: 'rodas5p', tolerance: 1e-7 });
    // 49 m³ above the 1 % at which the pump stops, 10 m³/h out.
    const empty = r.events.find((e) => e.message.includes('run empty'));
    expect((empty?.time as number) / 3600).toBeCloseTo(4.9, 6);
    expect(steady(fromText(s)).drifts[0].rate * 3600).toBeCloseTo(-10, 9);
  });
});

describe('what cannot be as asked is said', () => {
  test('a share is at most all, and the run says from when it was held there', () => {
    const s = `${HEAD}${feeds()}
splits: {raffinate: {pond: 60 %, out: rest}}
trains:
${train('a', 'aqueous: liquor -> raffinate\n    organic: organic -> loaded', 1)}
upsets:
  - {at: 2 h, change: pond.share, by: +100 %, over: 1 h}
`;
    const r = run(fromText(s), { integrator: 'rodas5p', tolerance: 1e-7 });
    expect(r.clamped).toHaveLength(1);
    expect(r.clamped[0].at).toBe(1);
    // 60 % grows by 60 % in an hour: all is reached after two thirds of it.
    expect(r.clamped[0].time / 3600).toBeCloseTo(2 + 2 / 3, 9);
    const [event] = r.events.filter((e) => e.message.includes('nothing is left for the rest'));
    expect(event.time / 3600).toBeCloseTo(2 + 2 / 3, 6);
    const read = reader(r.plant);
    expect(read(r.records.rows[r.records.rows.length - 1], 'out.flow')).toBeCloseTo(0, 12);
  });

  test('more taken out than comes in is an event', () => {
    const r = run(fromText(house('4 t/h')), { integrator: 'rodas5p', tolerance: 1e-6 });
    expect(r.events.map((e) => e.message)).toContain(
      'house holds too little copper: less is taken out of it than asked',
    );
  });

  test('a steady state without acid is told', () => {
    const s = `${HEAD}${feeds('  caustic: {phase: aqueous, flow: 60 m^3/h, neutralises: {acid: 120 g/L}}')}
trains:
${train('a', 'aqueous: liquor -> raffinate\n    organic: organic -> loaded', 1, '    stage 3: {takes: caustic}')}`;
    expect(steady(fromText(s)).usedUp).toEqual([{ stage: 'a.3', species: 'acid' }]);
    expect(steady(fromText(alone)).usedUp).toEqual([]);
  });
});

describe('holding times', () => {
  test('of a fresh phase that is shared out: all that the train holds by all that enters it', () => {
    const s = `${HEAD}${feeds()}
trains:
${train('a', 'aqueous: liquor -> raffinate\n    organic: organic -> loaded\n    arrangement: cross-current', 1)}`;
    const [f] = steady(fromText(s)).figures;
    // Mixers hold a third of the organic's share of O/A 1/3, layers 50 m³.
    const organic = 3 * (40 * (400 / 3 / (400 + 400 / 3)) + 50);
    expect(f.held.organic).toBeCloseTo((3600 * organic) / 400, 6);
    expect(f.held.aqueous).toBeCloseTo((3600 * 3 * (40 * 0.75 + 60)) / 400, 6);
  });

  test('an efficiency is that of the side for which it is stated', () => {
    const s = `${HEAD}${feeds()}
trains:
${train('a', 'aqueous: liquor -> raffinate\n    organic: organic -> loaded', 1)}`.replace(
      'stage_efficiency: 92 %',
      'side: organic, stage_efficiency: 80 %',
    );
    const [f] = steady(fromText(s)).figures;
    expect(f.side).toBe('organic');
    for (const e of f.solutes[0].efficiency) expect(e).toBeCloseTo(0.8, 9);
  });
});

describe('limits on purity, on ratios, and from a time on', () => {
  const two = (limits: string): string => `
title: Two
solutes: [a, b]
feeds:
  feed: {phase: aqueous, flow: 1 m^3/h, a: 10 g/L, b: 5 g/L}
  oil: {phase: organic, flow: 1 m^3/h}
trains:
  one:
    stages: 1
    aqueous: feed -> raffinate
    organic: oil -> extract
    mixer: {volume: 50 L, ka: 100 1/s}
    settler: {aqueous_volume: 0.5 m^3, organic_volume: 0.5 m^3}
    equilibrium: {a: {law: ratio, ratio: 9}, b: {law: ratio, ratio: 0.25}}
horizon: 10 h
limits:
${limits}`;

  test('at rest purity is Σ-weighted and a ratio is a ratio', () => {
    const r = run(
      fromText(
        two(`  - {keep: extract.purity of a, above: 89 %, from: 5 h}
  - {keep: raffinate.a / raffinate.b, below: 0.2, from: 5 h}
  - {keep: extract.b / raffinate.b, above: 26 %, from: 5 h}
  - {keep: extract.purity of a, above: 89 %}
`),
      ),
      fine,
    );
    const [purity, ratio, split, early] = r.limits;
    // One ideal stage, E_a = 9 and E_b = 0.25: extract 9 and 1 g/L, raffinate 1 and 4 g/L.
    expect(purity.worst.value).toBeCloseTo(90, 3);
    expect(purity.spells).toEqual([]);
    expect(ratio.spells[0].from).toBe(5 * 3600);
    expect(ratio.worst.value).toBeCloseTo(0.25, 3);
    expect(split.spells).toHaveLength(1);
    expect(split.worst.value).toBeCloseTo(0.25, 3);
    // In a barren settler there is nothing to be pure: it is judged from the first metal on, which is purer than the last.
    expect(early.atStart).toBe(false);
    expect(early.spells).toEqual([]);
  });
});
