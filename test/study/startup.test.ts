import { describe, expect, test } from 'vitest';
import type { Limit, Scenario } from '../../src/scenario/scenario.ts';
import { cascade, reader, runToEnd } from './cascade.ts';

const exact = { integrator: 'rodas5p', tolerance: 1e-10 };
const keep = (stream: string, value: number): Limit => ({
  stream,
  quantity: 's',
  side: 'below',
  value,
  from: 0,
});

describe('a layer of n parts passes a step and a pulse as n tanks in series', () => {
  // F(θ) = 1 − e^(−nθ)·Σ_(i<n) (nθ)^i/i!, E(θ) = n(nθ)^(n−1)·e^(−nθ)/(n − 1)!: O. Levenspiel, Chemical Reaction
  // Engineering, 3rd ed. (1999), ch. 14 (the pulse from memory); R. B. MacMullin and M. Weber, Trans. AIChE 31, 409 (1935).
  const erlang = (n: number, theta: number): number => {
    if (theta <= 0) return 0;
    let term = 1;
    let sum = 0;
    for (let i = 0; i < n; i++) {
      sum += term;
      term *= (n * theta) / (i + 1);
    }
    return 1 - Math.exp(-n * theta) * sum;
  };
  const residence = 1000;
  /** A tracer in both phases that does not transfer, mixers next to nothing, solute-free vessels. */
  const layer = (parts: number, feed: number, more: Partial<Scenario>): Scenario => {
    const s = cascade({
      stages: 1,
      aqueous: 0.02,
      organic: 0.03,
      feed,
      solvent: 1,
      law: null,
      transfer: { given: 'efficiency', efficiency: 0.9 },
      mixer: 1e-7,
      layers: { aqueous: 0.02 * residence, organic: 0.03 * residence },
      parts,
      horizon: 6 * residence,
      recordEvery: residence / 4,
    });
    const [t] = s.trains;
    return { ...s, trains: [{ ...t, initial: { aqueous: 'barren', organic: [0] } }], ...more };
  };
  const rows = [
    { n: 1, F: [0.632121, 0.864665, 0.950213], at95: 2.99573, at99: 4.60517 },
    { n: 2, F: [0.593994, 0.908422, 0.982649], at95: 2.37193, at99: 3.31918, peak: 0.735759 },
    { n: 3, F: [0.57681, 0.938031, 0.993768], at95: 2.0986, at99: 2.80198, peak: 0.812012 },
    { n: 5, F: [0.559507, 0.970747, 0.999143], at95: 1.8307, at99: 2.32093, peak: 0.976834 },
    { n: 10, F: [0.54207, 0.995005, 0.999993], at95: 1.57052, at99: 1.87831, peak: 1.317556 },
  ];

  test.each(rows)('step, n = $n', ({ n, F, at95, at99 }) => {
    const limits = [keep('raffinate', 0.95), keep('raffinate', 0.99), keep('extract', 0.95)];
    const { result } = runToEnd(layer(n, 1, { limits }), exact);
    const read = reader(result.plant);
    for (const stream of ['raffinate.s', 'extract.s']) {
      F.forEach((printed, i) => {
        expect(Math.abs(read(result.records.rows[4 * (i + 1)], stream) - printed)).toBeLessThan(6e-7);
      });
      result.records.rows.forEach((row, i) => {
        expect(Math.abs(read(row, stream) - erlang(n, i / 4))).toBeLessThan(1e-7);
      });
    }
    const crossed = result.limits.map((l) => l.spells[0].from / residence);
    [at95, at99, at95].forEach((printed, i) => {
      expect(Math.abs(crossed[i] - printed)).toBeLessThan(6e-6);
    });
  });

  test.each(rows.slice(1))('pulse, n = $n: its peak and its whole course', ({ n, peak }) => {
    const lasts = residence / 100;
    const change = { at: 0, quantity: 'feed.s', how: { to: 100 }, over: 0, lasts, words: '' };
    const pulsed = layer(n, 0, { upsets: [change], limits: [keep('raffinate', 10)] });
    const { result } = runToEnd(pulsed, exact);
    const read = reader(result.plant);
    result.records.rows.forEach((row, i) => {
      const known = 100 * (erlang(n, i / 4) - erlang(n, i / 4 - 0.01));
      expect(Math.abs(read(row, 'raffinate.s') - known)).toBeLessThan(1e-6);
    });
    const { worst } = result.limits[0];
    expect(Math.abs(worst.value - (peak as number))).toBeLessThan(1e-4);
    expect(Math.abs(worst.time / residence - 0.005 - (n - 1) / n)).toBeLessThan(1e-4);
  });
});

describe('start-up of equilibrium stages', () => {
  // (h + DH)·dx_n/dt = L·x_(n−1) + D·V·x_(n+1) − (L + D·V)·x_n, the cascade of L. Lapidus and N. R. Amundson, Ind. Eng.
  // Chem. 42, 1071 (1950) (from memory); with h = L = 1 and D·H = E·h. Times in h/L, solved outside this program by
  // eigenvalues −[(1 + E) − 2√E·cos(kπ/(N + 1))]/(1 + E): D. Kulkarni, D. Schmidt and S.-K. Tsui, Linear Algebra Appl.
  // 297, 63 (1999).
  const rows = [
    {
      N: 3,
      E: 1.5,
      T1: 3.25542,
      x: 0.1230769,
      t: [5.0409, 11.5983, 16.8383],
      first: 13.0861,
      mean: [4.84615, 2.21457],
    },
    {
      N: 5,
      E: 1,
      T1: 7.4641,
      x: 0.1666667,
      t: [12.0467, 27.0163, 39.0296],
      first: 27.0169,
      mean: [35 / 3, 11 / 3],
    },
    {
      N: 5,
      E: 2,
      T1: 5.44949,
      x: 0.015873,
      t: [10.0022, 21.056, 29.8304],
      first: 18.6807,
      mean: [9.57143, 2.60369],
    },
    { N: 10, E: 1, T1: 24.68708, x: 1 / 11, t: [41.1122, 90.562, 130.2948], first: 73.4547, mean: [40, 7] },
    {
      N: 10,
      E: 1.5,
      T1: 16.69652,
      x: 0.0058481,
      t: [32.5286, 66.3313, 93.2126],
      first: 44.8139,
      mean: [31.28659, 4.52183],
    },
  ];
  const unit = 100;

  test.each(rows)('N = $N, E = $E', ({ N, E, T1, x, t, first, mean }) => {
    const aqueous = 1 / unit;
    // Kremser for the raffinate; the extract from the balance over the cascade, with D = 1.
    const raffinate = E === 1 ? 1 / (N + 1) : (E - 1) / (E ** (N + 1) - 1);
    const extract = (1 - raffinate) / E;
    const horizon = 25 * T1 * unit;
    const s = cascade({
      stages: N,
      aqueous,
      organic: E * aqueous,
      feed: 1,
      law: { law: 'ratio', ratio: 1 },
      transfer: { given: 'ka', ka: 1e7, fixed: false },
      mixer: 1 + E,
      layers: { aqueous: 1e-8, organic: 1e-8 },
      horizon,
      recordEvery: horizon / 25,
      limits: [
        ...[0.6321, 0.95, 0.99].map((share) => keep('raffinate', share * raffinate)),
        keep('extract', 0.99 * extract),
        // A limit at nothing collects all that leaves: ∫ Q·c dt.
        keep('raffinate', 0),
        keep('extract', 0),
      ],
    });
    const { result, end } = runToEnd(s, exact);
    expect(Math.abs(end('raffinate.s') - x)).toBeLessThan(6e-8);
    const times = result.limits.map((l) => l.spells[0].from / unit);
    [...t, first].forEach((printed, i) => {
      expect(Math.abs(times[i] - printed), `time ${i}`).toBeLessThan(6e-5);
    });
    // Mean response time ∫(1 − c/c_end) dt.
    [raffinate * aqueous, extract * E * aqueous].forEach((rate, i) => {
      const delay = (horizon - (result.limits[4 + i].beyond as number) / rate) / unit;
      expect(Math.abs(delay - mean[i])).toBeLessThan(6e-6 + 2e-6 * mean[i]);
    });
    // Late in the start-up only the slowest mode is left: it falls by e in each T1.
    const read = reader(result.plant);
    const missing = [8, 9].map((k) => end('raffinate.s') - read(result.records.rows[k], 'raffinate.s'));
    expect(Math.abs(Math.log(missing[0] / missing[1]) - 1)).toBeLessThan(1e-3);
  });

  test.each([2, 3, 5, 8, 10])('at E = 1 the mean times are N(N + 2)/3 and (2N + 1)/3 of h/L, N = %i', (N) => {
    // (h + DH)·N(N + 2)/(6L) and (h + DH)(2N + 1)/(6L) with h = DH: the area over the response, in closed form.
    const horizon = 25 * unit * (N + 1) ** 2 * 0.25;
    const s = cascade({
      stages: N,
      aqueous: 0.01,
      organic: 0.01,
      feed: 1,
      law: { law: 'ratio', ratio: 1 },
      transfer: { given: 'ka', ka: 1e7, fixed: false },
      mixer: 2,
      layers: { aqueous: 1e-8, organic: 1e-8 },
      horizon,
      limits: [keep('raffinate', 0), keep('extract', 0)],
    });
    const { result } = runToEnd(s, exact);
    const ends = [1 / (N + 1), N / (N + 1)];
    [(N * (N + 2)) / 3, (2 * N + 1) / 3].forEach((known, i) => {
      const delay = (horizon - (result.limits[i].beyond as number) / (0.01 * ends[i])) / unit;
      expect(Math.abs(delay / known - 1)).toBeLessThan(1e-5);
    });
  });
});
