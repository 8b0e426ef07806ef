import { abs, minus, over, turn } from '../math/complex.ts';
import type { Complex } from '../math/eigen.ts';
import { simplex } from '../math/simplex.ts';
import type { Fopdt } from './rules.ts';

/** A step test: deviation of the measurement over time after a step of the output at 0. */
export interface StepTest {
  readonly step: number;
  readonly times: readonly number[];
  readonly values: readonly number[];
}

/** FOPDT with the sign of its gain, and how far it is off: r.m.s. over the largest deviation. */
export interface Fitted extends Fopdt {
  readonly error: number;
}

export function fopdtStep({ gain, lag, delay }: Fopdt, step: number, t: number): number {
  return t <= delay ? 0 : gain * step * -Math.expm1(-(t - delay) / lag);
}

/** Least squares over the whole test; for each lag and delay the best gain is linear and solved for. */
export function leastSquares(test: StepTest): Fitted | null {
  const { times, values, step } = test;
  const largest = values.reduce((m, v) => Math.max(m, Math.abs(v)), 0);
  if (!(largest > 0) || times.length < 4 || step === 0) return null;
  const span = times[times.length - 1];
  const gainOf = (lag: number, delay: number): { gain: number; error: number } => {
    let [xy, xx] = [0, 0];
    const shape = times.map((t) => fopdtStep({ gain: 1, lag, delay }, step, t));
    shape.forEach((x, k) => {
      xy += x * values[k];
      xx += x * x;
    });
    const gain = xx > 0 ? xy / xx : 0;
    const sum = shape.reduce((s, x, k) => s + (gain * x - values[k]) ** 2, 0);
    return { gain, error: Math.sqrt(sum / times.length) / largest };
  };
  const first = twoPoint(test, 'smith');
  const lag0 = Math.log(Math.max(first?.lag ?? span / 4, 1e-6 * span));
  const [logLag, root] = simplex(
    ([a, b]) => gainOf(Math.exp(a), b * b).error + Math.max(0, a - Math.log(10 * span)),
    [lag0, Math.sqrt(Math.max(0, first?.delay ?? 0))],
    0.3,
  );
  const [lag, delay] = [Math.exp(logLag), root * root];
  return { lag, delay, ...gainOf(lag, delay) };
}

/**
 * Two-point methods. Smith (Digital Computer Process Control, 1972): T = 1.5(t63.2 − t28.3), θ = t63.2 − T. Sundaresan and
 * Krishnaswamy, Can. J. Chem. Eng. 56, 257 (1978): T = 0.67(t85.3 − t35.3), θ = 1.3·t35.3 − 0.29·t85.3. The final value is
 * the mean of the last twentieth of the test. Null where the test does not pass the points.
 */
export function twoPoint(
  { step, times, values }: StepTest,
  by: 'smith' | 'sundaresan-krishnaswamy',
): Fopdt | null {
  const tail = values.slice(-Math.max(1, Math.floor(values.length / 20)));
  const final = tail.reduce((s, v) => s + v, 0) / tail.length;
  const reach = (share: number): number => {
    const k = values.findIndex((v) => (v - share * final) * Math.sign(final) >= 0);
    if (k <= 0) return k < 0 ? Number.NaN : times[0];
    const part = (share * final - values[k - 1]) / (values[k] - values[k - 1]);
    return times[k - 1] + part * (times[k] - times[k - 1]);
  };
  const made = (lag: number, delay: number): Fopdt | null =>
    Number.isFinite(lag) && lag > 0 && step !== 0
      ? { gain: final / step, lag, delay: Math.max(0, delay) }
      : null;
  if (by === 'smith') {
    const lag = 1.5 * (reach(-Math.expm1(-1)) - reach(-Math.expm1(-1 / 3)));
    return made(lag, reach(-Math.expm1(-1)) - lag);
  }
  const [a, b] = [reach(0.353), reach(0.853)];
  return made(0.67 * (b - a), 1.3 * a - 0.29 * b);
}

export const fopdtResponse = ({ gain, lag, delay }: Fopdt, omega: number): Complex => {
  const g = over({ re: gain, im: 0 }, { re: 1, im: omega * lag });
  const d = turn(-omega * delay);
  return { re: g.re * d.re - g.im * d.im, im: g.re * d.im + g.im * d.re };
};

/** Factors by which a fit may leave its first guess: over part of the frequencies gain and lag can run away together. */
const MOST_GAIN = 3;
const MOST_LAG = 20;

/** FOPDT fitted to a frequency response by least squares of the relative error; `start` is a first guess. */
export function fitResponse(response: readonly { omega: number; g: Complex }[], start: Fopdt): Fitted {
  const sign = Math.sign(start.gain) || 1;
  const model = ([k, T, d]: readonly number[]): Fopdt => ({
    gain: sign * Math.exp(k),
    lag: Math.exp(T),
    delay: d * d,
  });
  const error = (x: readonly number[]): number =>
    Math.sqrt(
      response.reduce(
        (s, { omega, g }) => s + (abs(minus(fopdtResponse(model(x), omega), g)) / abs(g)) ** 2,
        0,
      ) / response.length,
    );
  const beyond = (x: number, from: number, most: number): number =>
    Math.max(0, Math.abs(x - Math.log(from)) - Math.log(most));
  const judged = (x: readonly number[]): number =>
    error(x) + beyond(x[0], Math.abs(start.gain), MOST_GAIN) + beyond(x[1], start.lag, MOST_LAG);
  const x = simplex(
    judged,
    [Math.log(Math.abs(start.gain)), Math.log(start.lag), Math.sqrt(Math.max(1, start.delay))],
    0.3,
  );
  return { ...model(x), error: error(x) };
}
