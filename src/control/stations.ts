import type { F, Guard, Named, Pattern, Place, System } from '../solve/system.ts';
import { PatternBuilder } from './pattern.ts';

/**
 * A ratio station or a flow controller between a loop's output and a flow of the plant:
 *
 *   set point F* = g·u·A + (1 − g)·F_w,   dA/dt = (A_w − A)/T_A,   dF/dt = (F* − F)/T_F
 *
 * with u the output of the loop, A_w the wild flow (1 where the loop moves the flow itself), F_w the flow as the
 * schedule has it, and the gate g: 1 while the station is in service. A time constant of 0 passes the value on at once.
 * In service u·A is held between the least and the most that the flow may be; a guard stands at either.
 */
export interface Station {
  readonly name: string;
  /** Input of the plant that it sets. */
  readonly flow: number;
  /** Input of the plant that the output is multiplied by; −1: none. */
  readonly wild: number;
  /** s */
  readonly lag: number;
  readonly filter: number;
  /** Least and most of the flow, m³/s; 0 and Infinity where nothing is stated. */
  readonly low: number;
  readonly high: number;
  readonly output: Named;
}

/**
 * A flow on its way to its set point is judged by what it does to the vessels, which have tolerances of their own: its
 * transient of seconds would cost most of the steps otherwise.
 */
const LENIENT = 30;

/** A value that is only shown: an input that no balance reads, and an output of the same name. */
export type Shown = Named;

export interface Joined {
  readonly system: System;
  /** Per station: inputs of u and of g, place of F (−1: none), place of A (−1: none). */
  readonly stations: readonly {
    readonly output: number;
    readonly gate: number;
    readonly flowPlace: number;
    readonly wildPlace: number;
  }[];
  /** Inputs of the shown values. */
  readonly shown: readonly number[];
}

/**
 * The System with stations and shown values joined to it. Places, inputs and outputs of the System keep their numbers;
 * with no station its equations stay as they are, to the last bit.
 */
export function join(inner: System, stations: readonly Station[], shown: readonly Shown[]): Joined {
  const places: Place[] = [...inner.places];
  const inputs: Named[] = [...inner.inputs];
  const place = (path: string, flow: number): number =>
    places.push({ path, unit: 'm^3/s', kind: 'controller', scale: LENIENT * flow, floor: null }) - 1;
  const at = stations.map((s) => ({
    output: inputs.push(s.output) - 1,
    gate: inputs.push({ path: `${s.name}.in service`, unit: '', scale: 1 }) - 1,
    flowPlace: s.lag > 0 ? place(`${s.name}.flow`, inner.inputs[s.flow].scale) : -1,
    wildPlace: s.wild >= 0 && s.filter > 0 ? place(`${s.name}.wild flow`, inner.inputs[s.wild].scale) : -1,
  }));
  const shownAt = shown.map((q) => inputs.push(q) - 1);
  const passed = [...at.map((q) => q.output), ...shownAt];
  const outputs = [...inner.outputs, ...passed.map((i) => inputs[i])];
  const equations = new Equations(inner, stations, at, places.length);
  const { A, B } = equations;
  const c = new PatternBuilder(outputs.length);
  const d = new PatternBuilder(outputs.length);
  const cMap = equations.chain(inner.C, inner.D, c, d);
  const own = passed.map((input, k) => d.add(inner.outputs.length + k, input));
  const [C, D] = [c.pattern(), d.pattern()];
  const cValues = new Float64Array(inner.C.column.length);
  const dValues = new Float64Array(inner.D.column.length);
  const n = inner.places.length;
  return {
    stations: at,
    shown: shownAt,
    system: {
      topology: `${inner.topology}+${stations.map((s) => s.name).join('+')}`,
      places,
      inputs,
      parameters: inner.parameters,
      outputs,
      A,
      B,
      C,
      D,
      rhs(x, w, p, dx) {
        const v = equations.within(x, w);
        inner.rhs(x, v, p, dx);
        equations.lags(x, w, dx);
      },
      jacobian(x, w, p, values) {
        equations.derivatives(x, w, p, values, null);
      },
      byInput(x, w, p, values) {
        equations.derivatives(x, w, p, null, values);
      },
      output(x, w, p, y) {
        inner.output(x, equations.within(x, w), p, y);
        for (let k = 0; k < passed.length; k++) y[inner.outputs.length + k] = w[passed[k]];
      },
      byOutput(x, w, p, cs, ds) {
        inner.byOutput(x, equations.within(x, w), p, cValues, dValues);
        cs.fill(0);
        ds.fill(0);
        equations.spread(cMap, cValues, dValues, x, w, cs, ds, C, D);
        for (const { row, column } of own) put(D, ds, row, column, 1);
      },
      guards: [...inner.guards, ...equations.limits.map((q) => q.guard)],
      guard(x, w, p, g) {
        inner.guard(x, equations.within(x, w), p, g);
        equations.limits.forEach((q, k) => {
          g[inner.guards.length + k] = equations.beyond(q, x, w);
        });
      },
      conserved: inner.conserved.map((q) => {
        const weights = new Float64Array(places.length);
        weights.set(q.weights);
        return { name: q.name, weights };
      }),
      steady: [...inner.steady, ...places.slice(n).map(() => 'free' as const)],
    },
  };
}

type At = Joined['stations'][number];

/** A limit of a station's flow, and the guard that says when it holds it. */
interface FlowLimit {
  readonly station: number;
  readonly side: 'low' | 'high';
  /** m³/s */
  readonly value: number;
  readonly guard: Guard;
}

/** Where an entry of an inner pattern goes: to an own slot, or along a station's chain. */
interface Spread {
  /** `slot`: its place among the values of the outer pattern, once that is known. */
  readonly direct: { row: number; column: number; from: number; of: 'x' | 'w'; slot: number }[];
  readonly through: { row: number; station: number; from: number }[];
}

class Equations {
  readonly A: Pattern;
  readonly B: Pattern;
  readonly #inner: System;
  readonly #stations: readonly Station[];
  readonly #at: readonly At[];
  readonly #w: F;
  readonly #a: F;
  readonly #b: F;
  readonly #map: Spread;
  /** Limits of flows that are stated. */
  readonly limits: readonly FlowLimit[];

  constructor(inner: System, stations: readonly Station[], at: readonly At[], places: number) {
    this.#inner = inner;
    this.#stations = stations;
    this.#at = at;
    this.limits = stations.flatMap((s, station) =>
      (['low', 'high'] as const).flatMap((side) => {
        const value = s[side];
        if (side === 'low' ? value === 0 : value === Infinity) return [];
        const path = inner.inputs[s.flow].path;
        const guard: Guard = {
          name: `${path} ${side}`,
          direction: 1,
          message: `${path} is held at flow_${side} of ${s.name}`,
          action: 'report',
        };
        return [{ station, side, value, guard }];
      }),
    );
    this.#w = new Float64Array(inner.inputs.length);
    this.#a = new Float64Array(inner.A.column.length);
    this.#b = new Float64Array(inner.B.column.length);
    const a = new PatternBuilder(places);
    const b = new PatternBuilder(places);
    this.#map = this.chain(inner.A, inner.B, a, b);
    at.forEach((q, s) => {
      if (q.flowPlace >= 0) {
        a.add(q.flowPlace, q.flowPlace);
        this.#demandColumns(s, q.flowPlace, a, b);
      }
      if (q.wildPlace >= 0) {
        a.add(q.wildPlace, q.wildPlace);
        b.add(q.wildPlace, stations[s].wild);
      }
    });
    this.A = a.pattern();
    this.B = b.pattern();
  }

  /** Inputs as the plant itself sees them: the flows of the stations in their places. */
  within(x: F, w: F): F {
    const v = this.#w;
    v.set(w.subarray(0, v.length));
    this.#stations.forEach((s, k) => {
      const { flowPlace } = this.#at[k];
      v[s.flow] = flowPlace >= 0 ? x[flowPlace] : this.#demand(k, x, w);
    });
    return v;
  }

  lags(x: F, w: F, dx: F): void {
    this.#stations.forEach((s, k) => {
      const { flowPlace, wildPlace } = this.#at[k];
      if (flowPlace >= 0) dx[flowPlace] = (this.#demand(k, x, w) - x[flowPlace]) / s.lag;
      if (wildPlace >= 0) dx[wildPlace] = (w[s.wild] - x[wildPlace]) / s.filter;
    });
  }

  derivatives(x: F, w: F, p: F, jacobian: F | null, byInput: F | null): void {
    const v = this.within(x, w);
    if (jacobian) this.#inner.jacobian(x, v, p, this.#a);
    // A plant without stations needs no more than its own derivatives.
    if (byInput || this.#stations.length > 0) this.#inner.byInput(x, v, p, this.#b);
    jacobian?.fill(0);
    byInput?.fill(0);
    this.spread(this.#map, this.#a, this.#b, x, w, jacobian, byInput, this.A, this.B);
    this.#stations.forEach((s, k) => {
      const { flowPlace, wildPlace } = this.#at[k];
      if (flowPlace >= 0) {
        if (jacobian) put(this.A, jacobian, flowPlace, flowPlace, -1 / s.lag);
        this.#along(k, flowPlace, 1 / s.lag, x, w, jacobian, byInput, this.A, this.B);
      }
      if (wildPlace >= 0) {
        if (jacobian) put(this.A, jacobian, wildPlace, wildPlace, -1 / s.filter);
        if (byInput) put(this.B, byInput, wildPlace, s.wild, 1 / s.filter);
      }
    });
  }

  /** Where the entries of a pair of inner patterns (by places, by inputs) go, with their columns entered. */
  chain(byX: Pattern, byW: Pattern, outX: PatternBuilder, outW: PatternBuilder): Spread {
    const spread: Spread = { direct: [], through: [] };
    for (let row = 0; row + 1 < byX.rowStart.length; row++)
      for (let k = byX.rowStart[row]; k < byX.rowStart[row + 1]; k++) {
        outX.add(row, byX.column[k]);
        spread.direct.push({ row, column: byX.column[k], from: k, of: 'x', slot: -1 });
      }
    for (let row = 0; row + 1 < byW.rowStart.length; row++)
      for (let k = byW.rowStart[row]; k < byW.rowStart[row + 1]; k++) {
        const station = this.#stations.findIndex((s) => s.flow === byW.column[k]);
        if (station < 0) {
          outW.add(row, byW.column[k]);
          spread.direct.push({ row, column: byW.column[k], from: k, of: 'w', slot: -1 });
          continue;
        }
        spread.through.push({ row, station, from: k });
        const { flowPlace } = this.#at[station];
        if (flowPlace >= 0) outX.add(row, flowPlace);
        else this.#demandColumns(station, row, outX, outW);
      }
    return spread;
  }

  spread(
    map: Spread,
    byX: F,
    byW: F,
    x: F,
    w: F,
    outX: F | null,
    outW: F | null,
    px: Pattern,
    pw: Pattern,
  ): void {
    for (const q of map.direct) {
      if (q.of === 'x') {
        if (outX === null) continue;
        if (q.slot < 0) q.slot = slotOf(px, q.row, q.column);
        outX[q.slot] += byX[q.from];
      } else {
        if (outW === null) continue;
        if (q.slot < 0) q.slot = slotOf(pw, q.row, q.column);
        outW[q.slot] += byW[q.from];
      }
    }
    for (const q of map.through) {
      const { flowPlace } = this.#at[q.station];
      if (flowPlace >= 0) {
        if (outX) put(px, outX, q.row, flowPlace, byW[q.from]);
      } else this.#along(q.station, q.row, byW[q.from], x, w, outX, outW, px, pw);
    }
  }

  #wild(k: number, x: F, w: F): number {
    const { wild } = this.#stations[k];
    if (wild < 0) return 1;
    const { wildPlace } = this.#at[k];
    return wildPlace >= 0 ? x[wildPlace] : w[wild];
  }

  /** By how much of itself a flow would be beyond its limit; out of service it is not. */
  beyond({ station, side, value }: FlowLimit, x: F, w: F): number {
    const { output, gate } = this.#at[station];
    if (w[gate] !== 1) return -1;
    const own = w[output] * this.#wild(station, x, w);
    return (side === 'low' ? value - own : own - value) / value;
  }

  #demand(k: number, x: F, w: F): number {
    const g = w[this.#at[k].gate];
    const { low, high } = this.#stations[k];
    const own = Math.min(high, Math.max(low, w[this.#at[k].output] * this.#wild(k, x, w)));
    return g === 1 ? own : g * own + (1 - g) * w[this.#stations[k].flow];
  }

  #demandColumns(k: number, row: number, a: PatternBuilder, b: PatternBuilder): void {
    const { flow, wild } = this.#stations[k];
    const { output, gate, wildPlace } = this.#at[k];
    b.add(row, flow);
    b.add(row, output);
    b.add(row, gate);
    if (wildPlace >= 0) a.add(row, wildPlace);
    else if (wild >= 0) b.add(row, wild);
  }

  /** Adds factor · ∂F* to the row. */
  #along(
    k: number,
    row: number,
    factor: number,
    x: F,
    w: F,
    outX: F | null,
    outW: F | null,
    px: Pattern,
    pw: Pattern,
  ): void {
    const { flow, wild } = this.#stations[k];
    const { output, gate, wildPlace } = this.#at[k];
    const { low, high } = this.#stations[k];
    const A = this.#wild(k, x, w);
    const g = w[gate];
    const own = Math.min(high, Math.max(low, w[output] * A));
    // Held at a limit, the flow follows neither the output nor the wild flow.
    const free = own === w[output] * A ? g : 0;
    if (outW) {
      put(pw, outW, row, flow, factor * (1 - g));
      put(pw, outW, row, output, factor * free * A);
      put(pw, outW, row, gate, factor * (own - w[flow]));
      if (wild >= 0 && wildPlace < 0) put(pw, outW, row, wild, factor * free * w[output]);
    }
    if (outX && wildPlace >= 0) put(px, outX, row, wildPlace, factor * free * w[output]);
  }
}

/** Adds to the entry of a pattern. */
const put = (p: Pattern, values: F, row: number, column: number, v: number): void => {
  values[slotOf(p, row, column)] += v;
};

/** The columns of a row ascend. */
function slotOf(p: Pattern, row: number, column: number): number {
  let lo = p.rowStart[row];
  let hi = p.rowStart[row + 1] - 1;
  while (lo < hi) {
    const mid = (lo + hi) >> 1;
    if (p.column[mid] < column) lo = mid + 1;
    else hi = mid;
  }
  return lo;
}
