import { add, div, type Expr, max, min, mul, pow, select, sub } from '../math/expression.ts';
import { type Kernel, kernel } from '../math/kernel.ts';
import { smoothStep } from '../math/shapes.ts';

/**
 * 1/V that stays finite where a volume vanishes: exact above `least`, below it (2 − V/least)/least, which meets
 * 1/V in value and slope. A nearly empty vessel thus keeps bounded concentrations; nothing is clipped.
 */
export const perVolume = (V: Expr, least: Expr): Expr =>
  select(sub(V, least), div(1, V), div(sub(2, div(V, least)), least));

/** The one flux of a well-mixed part: of everything in it the share k a second goes somewhere, k·m. */
export const drained = kernel('drained', ['rate', 'amount'], (k, m) => mul(k, m));

/** Flux of a component in a feed: q·c. */
export const fed = kernel('fed', ['flow', 'content'], (q, c) => mul(q, c));

/** Flux of a volume that passes: q. */
export const passed = kernel('passed', ['flow'], (q) => q);

export const same = kernel('same', ['value'], (v) => v);
export const difference = kernel('difference', ['whole', 'part'], (whole, part) => sub(whole, part));
export const product = kernel('product', ['a', 'b'], (a, b) => mul(a, b));
export const rest = kernel('rest', ['share'], (a) => sub(1, a));
export const perVolumeOf = kernel('per volume', ['volume', 'least'], perVolume);
export const concentration = kernel('concentration', ['amount', 'per volume'], (m, i) => mul(m, i));

const signed = new Map<string, Kernel>();

/** Sum of values, each with its sign: '+-+' is a − b + c. */
export function signedSum(signs: string): Kernel {
  const found = signed.get(signs);
  if (found) return found;
  const made = kernel(
    `sum ${signs}`,
    Array.from(signs, (_, i) => `v${i}`),
    (first, ...rest) =>
      rest.reduce(
        (s, v, i) => (signs[i + 1] === '+' ? add(s, v) : sub(s, v)),
        signs[0] === '+' ? first : mul(-1, first),
      ),
  );
  signed.set(signs, made);
  return made;
}

/** a + b + …, of n values. */
export const sum = (n: number): Kernel => signedSum('+'.repeat(n));

/** Least flow that counts in a quotient, m³/s. */
const NO_FLOW = 1e-15;

/** Share that a flow q is of a stream: all of it where there is less. */
export const shareOfFlow = kernel('share of flow', ['taken', 'whole'], (q, whole) =>
  min(div(q, max(whole, NO_FLOW)), 1),
);

/** A share, where others have left that much. */
export const whereLeft = kernel('where left', ['share', 'left'], (share, left) => min(share, left));

const means = new Map<number, Kernel>();

/** Σ q·c/Σ q of n streams; without flow their plain mean. */
export function meanOf(n: number): Kernel {
  const found = means.get(n);
  if (found) return found;
  const names = Array.from({ length: n }, (_, i) => [`flow ${i}`, `content ${i}`]).flat();
  const made = kernel(`mean of ${n}`, names, (...args) => {
    const q = Array.from({ length: n }, (_, i) => add(args[2 * i], 1e-3 * NO_FLOW));
    return div(add(...q.map((v, i) => mul(v, args[2 * i + 1]))), add(...q));
  });
  means.set(n, made);
  return made;
}

/** Organic volume in a full mixer whose flows do not move: V·O/(A + O). */
export const steadyHoldup = kernel('steady hold-up', ['aqueous in', 'organic in', 'volume'], (a, o, V) =>
  div(mul(V, o), add(a, o)),
);

/** A full, well-mixed mixer gives up of everything in it the share (A + O)/V a second: no slip. */
export const turnover = kernel('turnover', ['aqueous in', 'organic in', 'volume'], (a, o, V) =>
  div(add(a, o), V),
);

/** Clear layer: what the stage holds of a phase, less mixer and band. */
export const clearLayer = kernel('clear layer', ['held', 'in mixer', 'in band'], (held, mixer, band) =>
  sub(held, add(mixer, band)),
);

/** 1/volume of one of n equal parts of a layer. */
export const perPart = kernel('per part', ['layer', 'parts', 'least'], (V, n, least) =>
  mul(n, perVolume(V, least)),
);

/**
 * Flow from part k to part k + 1 of a layer of n equal parts of which a share f of the inflow goes straight to the
 * last: (1 − f)·q_in + (q_out − q_in)·k/n, since each part takes up the same share of the change of volume.
 */
export const partFlow = kernel('part flow', ['in', 'out', 'short cut', 'k/n'], (qin, qout, f, part) =>
  add(mul(sub(1, f), qin), mul(sub(qout, qin), part)),
);

/** Recycle to hold a ratio r of organic to aqueous in the mixer, of either phase: max(0, what is missing). */
export const missingAqueous = kernel('missing aqueous', ['aqueous', 'organic', 'ratio'], (a, o, r) =>
  max(sub(div(o, r), a), 0),
);
export const missingOrganic = kernel('missing organic', ['aqueous', 'organic', 'ratio'], (a, o, r) =>
  max(sub(mul(a, r), o), 0),
);

/** Entrained flow: e·carrier·(throughput/design)^n. */
const entrainment = (e: Expr, q: Expr, a: Expr, o: Expr, d: Expr, n: Expr): Expr =>
  mul(e, q, pow(max(div(add(a, o), d), 1e-6), n));

const ENTRAINED = ['share', 'carrier', 'aqueous', 'organic', 'design', 'exponent'] as const;

/** The same in full vessels: no more than a part of what there is of the phase, or its own flow would run back. */
export const entrainedOf = kernel(
  'entrained',
  [...ENTRAINED, 'phase', 'most'],
  (e, q, a, o, d, n, phase, most) => min(entrainment(e, q, a, o, d, n), mul(most, phase)),
);

/** The same from a layer with a level: it ceases as the layer runs out. */
export const entrainedFrom = kernel(
  'entrained from',
  [...ENTRAINED, 'layer', 'least'],
  (e, q, a, o, d, n, V, least) => mul(entrainment(e, q, a, o, d, n), smoothStep(div(V, least))),
);

/** Share of a demand that a layer can still meet: 1 as long as it is more than nearly empty. */
export const available = kernel('available', ['layer', 'least'], (V, least) => smoothStep(div(V, least)));

/** How far a value is past a bound. */
export const past = kernel('past', ['value', 'bound'], (v, bound) => sub(v, bound));

/** One of two values by a mode: at 1 the first, at 0 the second. */
export const chosen = kernel('chosen', ['mode', 'at 1', 'at 0'], (m, a, b) => select(sub(m, 0.5), a, b));
