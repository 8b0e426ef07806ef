import { describe, expect, test } from 'vitest';
import { parseFormula } from '../../src/scenario/formula.ts';
import type { Formula, Law } from '../../src/scenario/scenario.ts';
import { reference } from '../support/plants.ts';
import { LawsAtWork, single } from './law-at-work.ts';

const formula = (text: string, constants: Record<string, number> = {}): Law => {
  const parsed = parseFormula(text, ['c_a', 'acid', 'b', ...Object.keys(constants)]);
  return { law: 'formula', organic: (parsed as { formula: Formula }).formula, constants };
};
const close = (value: number, known: number, relative = 1e-11): void => {
  expect(Math.abs(value - known), `${value} against ${known}`).toBeLessThanOrEqual(
    relative * Math.abs(known),
  );
};

const laws: { name: string; law: Law; acid?: number; most: number }[] = [
  { name: 'ratio', law: { law: 'ratio', ratio: 0.75 }, most: 50 },
  { name: 'langmuir', law: { law: 'langmuir', capacity: 12, affinity: 1.2 }, most: 600 },
  { name: 'freundlich, concave', law: { law: 'freundlich', coefficient: 3, exponent: 0.5 }, most: 50 },
  { name: 'freundlich, convex', law: { law: 'freundlich', coefficient: 0.5, exponent: 1.7 }, most: 50 },
  { name: 'freundlich, straight', law: { law: 'freundlich', coefficient: 2, exponent: 1 }, most: 50 },
  {
    name: 'table',
    law: { law: 'table', aqueous: [0, 2, 5, 10, 20, 40, 80], organic: [0, 4.6, 10.6, 18.5, 29.5, 42, 54] },
    most: 200,
  },
  {
    name: 'exchange, p = q = 2',
    law: { law: 'exchange', constant: 16, extractant: 10.5, perSolute: 1, p: 2, q: 2, acid: 0 },
    acid: 2,
    most: 60,
  },
  {
    name: 'exchange, p = 1.4, q = 0.8',
    law: { law: 'exchange', constant: 3, extractant: 9, perSolute: 1.1, p: 1.4, q: 0.8, acid: 0 },
    acid: 30,
    most: 60,
  },
  { name: 'formula with a ceiling', law: formula('18*c_a/(1 + 0.9*c_a)'), most: 900 },
  { name: 'formula without one', law: formula('2*c_a + k*c_a^2', { k: 0.1 }), most: 60 },
  { name: 'formula with acid', law: formula('18*c_a/(acid + 0.9*c_a)'), acid: 5, most: 4000 },
  { name: 'formula of functions', law: formula('30*tanh(c_a/9) + log(1 + c_a)'), most: 20 },
];

describe.each(laws)('$name', ({ law, acid, most }) => {
  const { organic, aqueous, organicSlope, aqueousSlope } = single(law, acid);
  const points = Array.from({ length: 60 }, (_, k) => most * ((k + 1) / 60) ** 3);

  test('each direction undoes the other, their slopes multiply to one', () => {
    for (const c of points) {
      close(aqueous(organic(c)), c, 1e-9);
      close(organicSlope(c) * aqueousSlope(organic(c)), 1, 1e-7);
    }
  });

  test('it rises, from 0', () => {
    expect(organic(0)).toBe(0);
    expect(aqueous(0)).toBe(0);
    points.reduce((before, c) => {
      expect(organic(c)).toBeGreaterThan(before);
      return organic(c);
    }, 0);
  });

  test('the slope is that of the curve', () => {
    for (const c of points) {
      const h = 1e-5 * c;
      close(organicSlope(c), (organic(c + h) - organic(c - h)) / (2 * h), 1e-6);
      const o = organic(c);
      close(aqueousSlope(o), (aqueous(o + 1e-6 * o) - aqueous(o - 1e-6 * o)) / (2e-6 * o), 1e-5);
    }
  });

  test('at zero value and slope pass over into a straight line', () => {
    for (const [f, slope] of [
      [organic, organicSlope],
      [aqueous, aqueousSlope],
    ] as const) {
      const at = slope(0);
      expect(at).toBeGreaterThan(0);
      expect(at).toBeLessThan(Infinity);
      close(f(-1), -at);
      close(f(-1e-9), -1e-9 * at);
      close(slope(-1), at);
      close(slope(-1e-12), at);
      close(slope(1e-12), at, 1e-5);
    }
  });
});

describe('printed values', () => {
  test('ratio: 0.75 × 8 = 6', () => {
    const { organic, aqueous } = single({ law: 'ratio', ratio: 0.75 });
    expect(organic(8)).toBe(6);
    expect(aqueous(6)).toBe(8);
  });

  test('Langmuir: 12·1.2·2.5/(1 + 1.2·2.5) = 9; three quarters of the sites are taken', () => {
    const { organic, aqueous, organicSlope } = single({ law: 'langmuir', capacity: 12, affinity: 1.2 });
    close(organic(2.5), 9);
    close(aqueous(9), 2.5);
    // capacity·b/(1 + b·c)²
    close(organicSlope(2.5), 14.4 / 16);
  });

  test('Freundlich: 3·√4 = 6, and 0.5·4² = 8', () => {
    const concave = single({ law: 'freundlich', coefficient: 3, exponent: 0.5 });
    close(concave.organic(4), 6);
    close(concave.aqueous(6), 4);
    const convex = single({ law: 'freundlich', coefficient: 0.5, exponent: 2 });
    close(convex.organic(4), 8);
    close(convex.aqueous(8), 4);
  });

  test('exchange: with K = 16, acid 2 and 6 of 10.5 g/L free, 4.5 g/L stand beside 4.5·2²/(16·6²) = 0.03125', () => {
    const law: Law = { law: 'exchange', constant: 16, extractant: 10.5, perSolute: 1, p: 2, q: 2, acid: 0 };
    const { organic, aqueous } = single(law, 2);
    close(aqueous(4.5), 0.03125, 1e-9);
    close(organic(0.03125), 4.5, 1e-9);
    // The same organic against an acid ten times as strong: a hundred times the aqueous.
    close(single(law, 20).aqueous(4.5), 3.125, 1e-9);
  });

  test('formula: 2·5 + 0.1·5² = 12.5', () => {
    const { organic, aqueous } = single(formula('2*c_a + 0.1*c_a^2'));
    close(organic(5), 12.5);
    close(aqueous(12.5), 5);
  });

  test('table: the points, and the cubic between them as SciPy draws it', () => {
    const known = reference('carboxylic-table') as {
      isotherm: Record<'aqueous_g_per_L' | 'organic_g_per_L' | 'slope', number[]> & {
        points: [number, number][];
      };
    };
    const { points } = known.isotherm;
    const { organic, organicSlope } = single({
      law: 'table',
      aqueous: points.map((p) => p[0]),
      organic: points.map((p) => p[1]),
    });
    for (const [a, o] of points) close(organic(a), o);
    known.isotherm.aqueous_g_per_L.forEach((c, i) => {
      close(organic(c), known.isotherm.organic_g_per_L[i], 1e-10);
      close(organicSlope(c), known.isotherm.slope[i], 1e-10);
    });
  });
});

describe('overloads', () => {
  const joins = (f: (c: number) => number, slope: (c: number) => number, at: number): void => {
    const h = 1e-9 * at;
    close(slope(at + h), slope(at - h), 1e-5);
    close(f(at + h) - f(at - h), 2 * h * slope(at), 1e-4);
  };
  const straight = (f: (c: number) => number, slope: (c: number) => number, at: number): void => {
    joins(f, slope, at);
    close(f(at * 1.5), f(at) + 0.5 * at * slope(at * 1.1), 1e-9);
  };

  test('Langmuir goes on by the tangent of 1/(1 − θ) beyond 0.999 of capacity', () => {
    const { aqueous, aqueousSlope } = single({ law: 'langmuir', capacity: 12, affinity: 1.2 });
    joins(aqueous, aqueousSlope, 0.999 * 12);
    // θ/(b·(1 − θ)) at θ = 0.999
    close(aqueous(0.999 * 12), 0.999 / (1.2 * 0.001), 1e-9);
    // θ = 2: 1/b·2·(1000 + 1000²·1.001).
    close(aqueous(24), (2 / 1.2) * (1000 + 1e6 * 1.001), 1e-9);
  });

  test('exchange goes on by the tangent of 1/F^p below a thousandth of free extractant', () => {
    const law: Law = { law: 'exchange', constant: 16, extractant: 10.5, perSolute: 1, p: 2, q: 2, acid: 0 };
    const { aqueous, aqueousSlope } = single(law, 2);
    const at = 0.999 * 10.5;
    joins(aqueous, aqueousSlope, at);
    const least = 0.001 * 10.5;
    close(aqueous(at), (at * 4) / (16 * least ** 2), 1e-6);
    // F = −10.5: 1/F² goes on as (1 + 2·(F₀ + 10.5)/F₀)/F₀².
    close(aqueous(21), ((21 * 4) / 16) * ((1 + (2 * (least + 10.5)) / least) / least ** 2), 1e-9);
  });

  test('a formula with a ceiling goes on by its tangent beyond 0.999 of it', () => {
    const { organic, organicSlope, aqueous } = single(formula('18*c_a/(1 + 0.9*c_a)'));
    const at = 0.999 / (0.9 * 0.001);
    straight(organic, organicSlope, at);
    close(aqueous(25), at + (25 - 0.999 * 20) / organicSlope(at), 1e-6);
  });

  test('where other species move the ceiling, it counts as they are: exact up to 0.999', () => {
    const law = formula('18*c_a/(acid + 0.9*c_a)');
    for (const acid of [0.5, 5, 180]) {
      const { organic, organicSlope, aqueous } = single(law, acid);
      const at = (0.999 * acid) / (0.9 * 0.001);
      close(organic(0.99 * at), (18 * 0.99 * at) / (acid + 0.9 * 0.99 * at), 1e-12);
      straight(organic, organicSlope, at);
      close(aqueous(25), at + (25 - 0.999 * 20) / organicSlope(at), 1e-6);
    }
  });

  test('a table goes on by its last secant: the value joins, the slope may not', () => {
    const { organic, organicSlope, aqueous } = single({
      law: 'table',
      aqueous: [0, 2, 5, 10],
      organic: [0, 4, 7, 8],
    });
    close(organic(10 + 1e-9), 8 + 0.2e-9);
    expect(organicSlope(10 + 1e-9)).toBe(0.2);
    close(organic(20), 10);
    close(aqueous(10), 20);
  });

  test('a formula without a ceiling has no overload', () => {
    const { organic } = single(formula('2*c_a + 0.1*c_a^2'));
    close(organic(1e6), 2e6 + 1e11);
  });
});

describe('small concentrations under a power law', () => {
  test.each([0.3, 0.7, 1.4, 3])(
    'exponent %f: value and slope join where the power is replaced',
    (exponent) => {
      const { organic, aqueous, organicSlope, aqueousSlope } = single({
        law: 'freundlich',
        coefficient: 2,
        exponent,
      });
      // The direction with the infinite slope is replaced below 1e-5 g/L.
      const [f, slope, back] =
        exponent < 1 ? [organic, organicSlope, aqueous] : [aqueous, aqueousSlope, organic];
      const at = 1e-5;
      close(slope(at * (1 + 1e-9)), slope(at * (1 - 1e-9)), 1e-6);
      for (const c of [-1e-4, 1e-9, 1e-7, 3e-6, 9.9e-6, 1.1e-5, 1e-3]) close(back(f(c)), c, 1e-9);
    },
  );
});

describe('several solutes', () => {
  const there = (w: LawsAtWork, aqueous: readonly number[], acid = 2): number[] =>
    aqueous.map((_, i) => w.value(i, 'organic', { aqueous, acid }));
  const back = (w: LawsAtWork, organic: readonly number[], acid = 2): number[] =>
    organic.map((_, i) => w.value(i, 'aqueous', { organic, acid }));

  test('Langmuir: 10·2/5 = 4 and 20·0.5·4/5 = 8 share the sites; θ = 0.4 each, 0.2 free', () => {
    const w = new LawsAtWork([
      { law: 'langmuir', capacity: 10, affinity: 1 },
      { law: 'langmuir', capacity: 20, affinity: 0.5 },
    ]);
    there(w, [2, 4]).forEach((c, i) => {
      close(c, [4, 8][i]);
    });
    back(w, [4, 8]).forEach((c, i) => {
      close(c, [2, 4][i]);
    });
    // ∂c*_a,1/∂c_o,2 = θ₁/(b₁·free²·capacity₂)
    close(w.slope(0, 'aqueous', { organic: [4, 8] }, 1), 0.4 / (0.04 * 20));
  });

  test('exchange: both draw on one extractant, each with its own exponents', () => {
    const w = new LawsAtWork([
      { law: 'exchange', constant: 16, extractant: 11, perSolute: 1, p: 2, q: 2, acid: 0 },
      { law: 'exchange', constant: 0.25, extractant: 11, perSolute: 1.1, p: 1.5, q: 1, acid: 0 },
    ]);
    // F = 11 − 4 − 1.1·2 = 4.8
    const known = [(4 * 4) / (16 * 4.8 ** 2), (2 * 2) / (0.25 * 4.8 ** 1.5)];
    back(w, [4, 2]).forEach((c, i) => {
      close(c, known[i], 1e-9);
    });
    there(w, known).forEach((c, i) => {
      close(c, [4, 2][i], 1e-9);
    });
  });

  test('partials across solutes and by the acid are those of the surface', () => {
    const w = new LawsAtWork([
      { law: 'exchange', constant: 16, extractant: 11, perSolute: 1, p: 2, q: 2, acid: 0 },
      { law: 'exchange', constant: 0.25, extractant: 11, perSolute: 1.1, p: 1.5, q: 1, acid: 0 },
    ]);
    const at = { aqueous: [0.3, 2], organic: [4, 2], acid: 3 };
    for (const side of ['aqueous', 'organic'] as const)
      for (const i of [0, 1]) {
        const other = side === 'aqueous' ? 'organic' : 'aqueous';
        for (const by of [0, 1]) {
          const moved = (h: number) =>
            w.value(i, side, { ...at, [other]: at[other].map((c, k) => (k === by ? c + h : c)) });
          close(w.slope(i, side, at, by), (moved(1e-5) - moved(-1e-5)) / 2e-5, 1e-7);
        }
        const acid = (h: number) => w.value(i, side, { ...at, acid: at.acid + h });
        close(w.byAcid(i, side, at), (acid(1e-5) - acid(-1e-5)) / 2e-5, 1e-7);
      }
  });

  test('a formula may name another solute and the acid', () => {
    const w = new LawsAtWork([formula('5*c_a/(1 + b + 0.1*acid)'), { law: 'ratio', ratio: 2 }]);
    close(w.value(0, 'organic', { aqueous: [3, 1], acid: 10 }), 5);
    close(w.value(0, 'aqueous', { aqueous: [0, 1], organic: [5, 0], acid: 10 }), 3);
    close(w.byAcid(0, 'organic', { aqueous: [3, 1], acid: 10 }), (-0.1 * 15) / 9);
    // From 5·c_a/(1 + b + 0.1·acid) = c_o: ∂c_a/∂acid = 0.1·c_o/5.
    close(w.byAcid(0, 'aqueous', { aqueous: [0, 1], organic: [5, 0], acid: 10 }), 0.1);
  });

  test('solutes under different laws do not know of each other', () => {
    const w = new LawsAtWork([
      { law: 'langmuir', capacity: 10, affinity: 1 },
      { law: 'ratio', ratio: 3 },
    ]);
    expect(w.slope(0, 'organic', { aqueous: [2, 9] }, 1)).toBe(0);
    close(w.value(0, 'organic', { aqueous: [4, 9] }), 8);
  });
});

test('acid that runs out leaves the exchange finite', () => {
  const law: Law = { law: 'exchange', constant: 16, extractant: 10.5, perSolute: 1, p: 2, q: 2, acid: 0 };
  for (const acid of [1e-3, 1e-6, 0, -1e-6, -1]) {
    const { organic, aqueous } = single(law, acid);
    expect(organic(1)).toBeGreaterThan(10);
    expect(organic(1)).toBeLessThanOrEqual(10.5);
    // Half loaded, at a distribution ratio of a million at most: 5/(10⁶·(5.5/10.5)²).
    expect(aqueous(5)).toBeGreaterThan(0);
    expect(aqueous(5)).toBeLessThan(2e-5);
  }
});
