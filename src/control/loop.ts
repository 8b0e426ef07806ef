import type { Device, Drive } from '../solve/device.ts';
import type { F } from '../solve/system.ts';
import { Sampler } from './analyser.ts';
import { Feedforward } from './feedforward.ts';
import { limitsAt } from './limits.ts';
import { cornerAfter, slopeOf, valueAt } from './line.ts';
import { OutputCourse } from './output-course.ts';
import { type Beside, Pid } from './pid.ts';
import { follow, type Segment } from './scan.ts';
import type { LoopSpec } from './spec.ts';

/** Rounding below which an output has not moved. */
const SAME = 1e-14;
const NONE: Beside = { factor: 1, added: 0 };

/** What a loop did in a run. */
export interface LoopHistory {
  /** Results as they came: s and SI. */
  readonly results: { readonly time: number; readonly value: number | null }[];
  /** Σ|Δ output|. */
  travel: number;
  /** s in automatic, s with the output at a limit, s that it followed its slew. */
  automatic: number;
  atLimit: number;
  slewing: number;
}

/** Analyser, controller, limits and slew of one loop, as a device of the run. */
export class SampledLoop implements Device {
  readonly name: string;
  readonly history: LoopHistory = { results: [], travel: 0, automatic: 0, atLimit: 0, slewing: 0 };
  readonly #s: LoopSpec;
  #sampler: Sampler;
  #pid: Pid;
  #ahead: Feedforward | null;
  #out: OutputCourse;
  /** The loop whose set point this one moves. */
  readonly #inner: SampledLoop | null;
  readonly #atRest: boolean;
  #auto = false;
  #pv = 0;
  #last = 0;
  #nextMode = 0;
  #nextService = 0;
  #nextSetPoint = Infinity;
  #nextManual = Infinity;
  #nextLimit = Infinity;
  /** It goes on from where another one was. */
  #resumed = false;
  /** While it runs on a scan: how output and integral go on until the next event. */
  #segment: Segment | null = null;
  #now = 0;
  /** The course that the input was last given. */
  #given = { from: 0, value: 0, slope: 0 };

  /** `atRest`: the run starts from the steady state with this loop closed. */
  constructor(spec: LoopSpec, inner: SampledLoop | null = null, atRest = false) {
    this.name = spec.name;
    this.#s = spec;
    this.#inner = inner;
    this.#atRest = atRest;
    this.#sampler = new Sampler(spec.analyser, spec.measured, spec.weighedBy, spec.seed);
    this.#pid = new Pid(spec.settings);
    this.#ahead = spec.feedforward && new Feedforward(spec.feedforward);
    this.#out = new OutputCourse(spec.move);
  }

  /**
   * A loop that goes on at `t` from where another one of the same name was; what is to happen to it from then on may
   * differ.
   */
  static resumed(was: SampledLoop, spec: LoopSpec, inner: SampledLoop | null, t: number): SampledLoop {
    const own = new SampledLoop(spec, inner);
    own.#sampler = was.#sampler.copy();
    own.#pid = was.#pid.copy();
    own.#ahead = was.#ahead?.copy() ?? null;
    own.#out = was.#out.copy();
    own.#auto = was.#auto;
    own.#pv = was.#pv;
    own.#last = was.#last;
    own.#segment = was.#segment;
    // What it did before is in the history of the other one.
    own.#now = t;
    own.#given = was.#given;
    own.#resumed = true;
    // What is due at `t` itself has not been done yet.
    const before = t - SAME * Math.abs(t);
    const due = (list: readonly { readonly at: number }[]): number => {
      const next = list.findIndex((q) => q.at >= before);
      return next < 0 ? list.length : next;
    };
    own.#nextMode = due(spec.modes);
    own.#nextService = due(spec.service);
    own.#nextSetPoint = cornerAfter(spec.setPoint, before);
    own.#nextManual = spec.manual ? cornerAfter(spec.manual, before) : Infinity;
    own.#nextLimit = own.#limitAfter(before);
    return own;
  }

  /** A copy as it is at `t`, with nothing left to happen but what it was told before. */
  kept(t: number): SampledLoop {
    return SampledLoop.resumed(this, this.#s, null, t);
  }

  get automatic(): boolean {
    return this.#auto;
  }

  get measurement(): number {
    return this.#pv;
  }

  get output(): OutputCourse {
    return this.#out;
  }

  get integral(): number {
    return this.#pid.integral;
  }

  begin(t: number, y: F, w: F, drive: Drive): void {
    if (this.#resumed) {
      this.#goOn(t, drive);
      return;
    }
    const { inputs, auto, setPoint, manual } = this.#s;
    this.#now = t;
    this.#last = t;
    this.#pv = y[this.#s.measured];
    this.#pid.begin(this.#pv);
    this.#ahead?.begin(t, y);
    this.#out.set(t, w[inputs.output]);
    this.#given = { from: t, value: w[inputs.output], slope: 0 };
    drive(inputs.measurement, t, this.#pv, 0);
    if (setPoint.times.length > 0) {
      drive(inputs.setPoint, t, valueAt(setPoint, t), slopeOf(setPoint, t));
      this.#nextSetPoint = cornerAfter(setPoint, t);
    }
    if (manual) this.#nextManual = cornerAfter(manual, t - 1e-9);
    this.#nextLimit = this.#limitAfter(t);
    this.#bound(t, w);
    this.#auto = auto;
    if (!auto) return;
    const sp = this.#setPoint(t, w, drive);
    if (this.#atRest) this.#pid.settle(this.#out.at(t), sp, this.#beside());
    else this.#pid.track(this.#out.at(t), sp, this.#beside());
    if (this.#s.runs === 'scan') this.#plan(t, sp);
  }

  /** Shows what it has driven so far. */
  #goOn(t: number, drive: Drive): void {
    const { inputs, setPoint, service } = this.#s;
    drive(inputs.measurement, t, this.#pv, 0);
    if (setPoint.times.length > 0) drive(inputs.setPoint, t, valueAt(setPoint, t), slopeOf(setPoint, t));
    const { from, value, slope } = this.#given;
    drive(inputs.output, t, value + slope * (t - from), slope);
    if (this.#nextService > 0) drive(inputs.gate, t, service[this.#nextService - 1].on ? 1 : 0, 0);
  }

  #limitAfter(t: number): number {
    const { limits } = this.#s;
    return limits ? Math.min(cornerAfter(limits.low, t), cornerAfter(limits.high, t)) : Infinity;
  }

  /** Takes the limits as they are now; where the flow means nothing they stay. */
  #bound(t: number, w: F): void {
    const { inputs, move } = this.#s;
    if (inputs.wild >= 0 && w[inputs.wild] < move.leastWild) return;
    const { low, high } = limitsAt(this.#s, t, w);
    this.#out.low = low;
    this.#out.high = high;
  }

  nextRead(): number {
    const idle = this.#auto
      ? Infinity
      : Math.min(this.#sampler.nextResult(), this.#ahead?.sampler.nextResult() ?? Infinity);
    const shown = this.#scanning() ? Infinity : this.#nextSetPoint;
    return Math.min(this.#sampler.nextSample(), this.#ahead?.sampler.nextSample() ?? Infinity, idle, shown);
  }

  read(t: number, y: F, _w: F, drive: Drive): void {
    if (this.#nextSetPoint <= t && !this.#scanning()) this.#passSetPoint(drive);
    if (this.#sampler.nextSample() <= t) this.#sampler.sample(y);
    if (this.#ahead && this.#ahead.sampler.nextSample() <= t) this.#ahead.sampler.sample(y);
    if (this.#auto) return;
    if (this.#ahead?.sampler.ready(t)) this.#ahead.take(this.#ahead.sampler.nextResult());
    if (this.#sampler.ready(t)) {
      const at = this.#sampler.nextResult();
      this.#takeResult(at, drive);
      this.#pid.begin(this.#pv);
    }
  }

  nextMove(): number {
    const { modes, service } = this.#s;
    const results = this.#auto
      ? Math.min(this.#sampler.nextResult(), this.#ahead?.sampler.nextResult() ?? Infinity)
      : Infinity;
    return Math.min(
      results,
      this.#out.rampEnd,
      modes[this.#nextMode]?.at ?? Infinity,
      service[this.#nextService]?.at ?? Infinity,
      this.#auto ? Infinity : this.#nextManual,
      this.#nextLimit,
      this.#scanning() ? Math.min(this.#nextSetPoint, this.#segment?.until ?? Infinity) : Infinity,
    );
  }

  pass(from: number, to: number, at: (t: number) => F): void {
    this.#sampler.pass(from, to, at);
    this.#ahead?.sampler.pass(from, to, at);
  }

  move(t: number, _y: F, w: F, drive: Drive): boolean {
    const before = this.#given.value + this.#given.slope * (t - this.#given.from);
    this.#account(t);
    this.#advance(t);
    this.#out.settle(t);
    this.#bound(t, w);
    if (this.#nextLimit <= t) {
      this.#nextLimit = this.#limitAfter(t);
      // An output beyond its new limit goes there, at its slew.
      if (this.#out.clamp(this.#out.at(t)) !== this.#out.at(t)) this.#out.toward(t, this.#out.at(t));
    }
    const moved = this.#switch(t, w, drive);
    if (this.#auto) this.#automatic(t, w, drive);
    else if (this.#nextManual <= t) this.#byHand(t);
    const value = this.#out.at(t);
    const slope = this.#out.slopeAt(t);
    const changed = Math.abs(value - before) > SAME * Math.abs(value) || slope !== this.#given.slope;
    if (changed) {
      this.history.travel += Math.abs(value - before);
      this.#given = { from: t, value, slope };
      drive(this.#s.inputs.output, t, value, slope);
    }
    return changed || moved;
  }

  /** The run is over: what went on until then counts. */
  finish(t: number): void {
    this.#account(t);
  }

  #scanning(): boolean {
    return this.#auto && this.#s.runs === 'scan';
  }

  #beside(): Beside {
    return this.#ahead ? { factor: this.#ahead.factor || 1, added: this.#ahead.added } : NONE;
  }

  #setPoint(t: number, w: F, drive: Drive): number {
    if (this.#s.setPoint.times.length === 0) return w[this.#s.inputs.setPoint];
    while (this.#nextSetPoint <= t) this.#passSetPoint(drive);
    return valueAt(this.#s.setPoint, t);
  }

  #passSetPoint(drive: Drive): void {
    const at = this.#nextSetPoint;
    const { setPoint, inputs } = this.#s;
    drive(inputs.setPoint, at, valueAt(setPoint, at), slopeOf(setPoint, at));
    this.#nextSetPoint = cornerAfter(setPoint, at);
  }

  /** Whether the result was good. */
  #takeResult(t: number, drive: Drive): boolean {
    const { value } = this.#sampler.result();
    this.history.results.push({ time: t, value });
    if (value === null) return false;
    this.#pv = value;
    drive(this.#s.inputs.measurement, t, value, 0);
    return true;
  }

  /** Changes of mode and of service that are due; whether the station went in or out of service. */
  #switch(t: number, w: F, drive: Drive): boolean {
    const { modes, service, inputs } = this.#s;
    let moved = false;
    for (; (service[this.#nextService]?.at ?? Infinity) <= t; this.#nextService++) {
      const { on } = service[this.#nextService];
      moved = true;
      drive(inputs.gate, t, on ? 1 : 0, 0);
      // Back in service it goes on from the flow as it is.
      if (on) this.#out.set(t, inputs.wild < 0 ? w[inputs.flow] : w[inputs.flow] / w[inputs.wild]);
    }
    for (; (modes[this.#nextMode]?.at ?? Infinity) <= t; this.#nextMode++) {
      const { auto } = modes[this.#nextMode];
      if (auto === this.#auto) continue;
      if (auto) this.#goAutomatic(t, w, drive);
      else this.#goManual(t);
    }
    return moved;
  }

  #goAutomatic(t: number, w: F, drive: Drive): void {
    this.#auto = true;
    this.#last = t;
    this.#out.hold(t);
    this.#pid.begin(this.#pv);
    this.#ahead?.refer();
    const sp = this.#setPoint(t, w, drive);
    this.#pid.track(this.#out.at(t), sp, this.#beside());
    if (this.#s.runs === 'scan') this.#plan(t, sp);
  }

  #goManual(t: number): void {
    this.#auto = false;
    this.#segment = null;
    this.#out.hold(t);
  }

  #byHand(t: number): void {
    const line = this.#s.manual;
    if (!line) return;
    this.#out.toward(t, valueAt(line, t));
    this.#nextManual = cornerAfter(line, t);
  }

  #automatic(t: number, w: F, drive: Drive): void {
    let fresh = false;
    let bad = false;
    if (this.#ahead?.sampler.ready(t)) {
      this.#ahead.take(t);
      fresh = true;
    }
    let due = false;
    while (this.#sampler.ready(t)) {
      if (this.#takeResult(t, drive)) due = true;
      else bad = true;
    }
    if (bad && this.#s.analyser.onBad === 'manual') {
      this.#goManual(t);
      return;
    }
    const sp = this.#setPoint(t, w, drive);
    if (this.#holds(w)) {
      this.#last = t;
      this.#pid.begin(this.#pv);
      this.#pid.track(this.#out.at(t), sp, this.#beside());
      return;
    }
    if (this.#s.runs === 'scan') {
      if (due) this.#pid.take(this.#pv, 0);
      this.#plan(t, sp);
    } else if (due) this.#execute(t, sp, w);
    else if (fresh) this.#out.toward(t, this.#pid.demand(sp, 0, this.#beside()));
  }

  /** Nothing to act on: no wild flow, or an inner loop that does not listen. */
  #holds(w: F): boolean {
    const { wild } = this.#s.inputs;
    if (wild >= 0 && w[wild] < this.#s.move.leastWild) return true;
    return this.#inner !== null && !this.#inner.automatic;
  }

  #execute(t: number, sp: number, w: F): void {
    const h = t - this.#last;
    this.#last = t;
    this.#pid.take(this.#pv, h);
    const beside = this.#beside();
    const demand = this.#pid.demand(sp, h, beside);
    const reached = this.#out.reach(t, demand, h);
    let actual = reached;
    if (this.#s.inputs.overruling.some((i) => w[i] === 0)) actual = this.#out.low;
    else if (this.#inner?.output.bound(t)) actual = this.#inner.measurement;
    this.#pid.commit(sp, h, demand, actual, beside);
    this.#out.toward(t, demand);
  }

  /** On a scan: output and integral from here to the next event. */
  #plan(t: number, sp: number): void {
    this.#segment = follow(t, this.#pid, sp, this.#s, this.#out, this.#beside());
  }

  #advance(t: number): void {
    if (this.#segment) this.#pid.integral = this.#segment.integral(t);
  }

  #account(t: number): void {
    const span = t - this.#now;
    this.history.travel += Math.abs(this.#given.slope) * span;
    if (this.#auto) {
      this.history.automatic += span;
      if (this.#out.bound(this.#now)) this.history.atLimit += span;
      else if (this.#out.slewing(this.#now)) this.history.slewing += span;
    }
    this.#now = t;
  }
}
