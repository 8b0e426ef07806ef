import { add, div, type Expr, mul, select, sub } from '../math/expression.ts';
import { kernel } from '../math/kernel.ts';

/**
 * 1/V that stays finite where a volume vanishes: exact above `least`, below it (2 − V/least)/least, which meets
 * 1/V in value and slope. A nearly empty vessel thus keeps bounded concentrations; nothing is clipped.
 */
export const perVolume = (V: Expr, least: Expr): Expr =>
  select(sub(V, least), div(1, V), div(sub(2, div(V, least)), least));

/** Flux of a dissolved amount that a flow carries out of a well-mixed part: q·m/V. */
export const carried = kernel('carried', ['flow', 'amount', 'perVolume'], (q, m, i) => mul(q, m, i));

/** Flux of a component in a feed: q·c. */
export const fed = kernel('fed', ['flow', 'content'], (q, c) => mul(q, c));

/** Flux of a volume that passes: q. */
export const passed = kernel('passed', ['flow'], (q) => q);

/** A full, well-mixed mixer gives up of everything in it the share (Q_a + Q_o)/V a second: no slip. */
export const overflowed = kernel(
  'mixer overflow',
  ['aqueous flow', 'organic flow', 'volume', 'amount'],
  (a, o, V, m) => mul(div(add(a, o), V), m),
);

/** Organic volume in a mixer whose flows do not move: V·Q_o/(Q_a + Q_o). */
export const steadyHoldup = kernel('steady hold-up', ['aqueous flow', 'organic flow', 'volume'], (a, o, V) =>
  div(mul(V, o), add(a, o)),
);

export const difference = kernel('difference', ['whole', 'part'], (whole, part) => sub(whole, part));

/** 1/volume of one of n equal parts of a layer that holds what the mixer leaves of the stage's phase. */
export const perPart = kernel('per part', ['held', 'in mixer', 'parts', 'least'], (held, mixer, n, least) =>
  mul(n, perVolume(sub(held, mixer), least)),
);

export const perVolumeOf = kernel('per volume', ['volume', 'least'], (V, least) => perVolume(V, least));

/**
 * Flow from part k to part k + 1 of a layer of n equal parts: q_in + (q_out − q_in)·k/n, since each part takes up
 * the same share of the change of volume. q_in is this phase's share of the mixer overflow.
 */
export const partFlow = kernel(
  'part flow',
  ['in mixer', 'volume', 'aqueous flow', 'organic flow', 'flow out', 'k/n'],
  (v, V, a, o, out, f) => {
    const entering = mul(div(v, V), add(a, o));
    return add(entering, mul(sub(out, entering), f));
  },
);

export const pumped = kernel('pumped', ['set flow', 'running'], (q, on) => mul(q, on));

/** What a full tank cannot keep: inflow less outflow, while it overflows. */
export const spilled = kernel(
  'spilled',
  ['overflowing', 'inflow', 'outflow', 'share'],
  (on, qin, qout, share) => mul(on, sub(qin, qout), share),
);

export const same = kernel('same', ['value'], (v) => v);

export const concentration = kernel('concentration', ['amount', 'perVolume'], (m, i) => mul(m, i));

/** c = m/V in a mixer phase that may vanish. */
export const mixerConcentration = kernel(
  'mixer concentration',
  ['amount', 'volume', 'least'],
  (m, V, least) => mul(m, perVolume(V, least)),
);
