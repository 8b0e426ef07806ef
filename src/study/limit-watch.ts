import { crossing } from '../math/roots.ts';
import type { Plant } from '../plant/assemble.ts';
import type { Limit } from '../scenario/scenario.ts';
import type { Inputs } from '../solve/inputs.ts';
import type { Watcher } from '../solve/integrate.ts';
import type { Step } from '../solve/integrator.ts';
import type { F } from '../solve/system.ts';

/** One uninterrupted time outside a limit, s; `to` is null while it lasts. */
export interface Spell {
  readonly from: number;
  to: number | null;
}

export interface LimitReport {
  readonly limit: Limit;
  readonly path: string;
  readonly unit: string;
  /** Outside the limit from the moment on from which it counts. */
  readonly atStart: boolean;
  readonly spells: readonly Spell[];
  /** s outside, in all spells together. */
  readonly outside: number;
  /** kg beyond a concentration limit: ∫ Q·max(c − L, 0) dt, null for other quantities and lower limits. */
  readonly beyond: number | null;
  /** m³ of the stream that left outside the limit; null where it has no flow. */
  readonly volume: number | null;
  readonly worst: { readonly value: number; readonly time: number };
  /** All outputs at the worst moment. */
  readonly atWorst: F;
}

/** Points looked at in each step, the end included: a spell between two of them must be shorter than a fifth of a step. */
const LOOKS = 5;
/** Share of a step from its end within which a peak differs from the end by less than a millionth of the bend. */
const BESIDE = 1e-3;

/** Share of what is typical below which there is nothing to compare. */
const NOTHING = 1e-3;

/** What a purity is a share of, and what a ratio is divided by. */
function needed({ scenario: s }: Plant, { stream, quantity }: Limit): string[] {
  const over = quantity.split(' / ')[1];
  if (over !== undefined) return [over];
  return quantity.startsWith('purity of ') ? s.solutes.map((n) => `${stream}.${n}`) : [];
}

/** Follows one limit through a run, on dense output: crossings, worst value, amount beyond. */
export class LimitWatch implements Watcher {
  readonly #plant: Plant;
  readonly #limit: Limit;
  readonly #output: number;
  /** Flow of the stream, and whether what it carries beyond the limit is an amount. */
  readonly #flow: number;
  readonly #carries: boolean;
  /** Outputs that must be there for a purity or a ratio to be one, and how much of them. */
  readonly #needs: readonly number[];
  readonly #least: number;
  readonly #sign: 1 | -1;
  readonly #spells: Spell[] = [];
  readonly #x: F;
  readonly #w: F;
  readonly #y: F;
  #began = false;
  #atStart = false;
  #over = false;
  /** Excess where the last step or stretch ended. */
  #last = 0;
  #beyond = 0;
  #volume = 0;
  #outside = 0;
  #worst = { value: Number.NaN, time: 0 };
  #atWorst: F = new Float64Array(0);

  constructor(plant: Plant, limit: Limit) {
    const { system } = plant;
    const find = (q: string): number => system.outputs.findIndex((o) => o.path === `${limit.stream}.${q}`);
    this.#plant = plant;
    this.#limit = limit;
    this.#output = find(limit.quantity);
    this.#flow = find('flow');
    this.#carries = this.#flow >= 0 && system.outputs[this.#output]?.unit === 'kg/m^3';
    this.#sign = limit.side === 'below' ? 1 : -1;
    this.#needs = needed(plant, limit).map((path) => system.outputs.findIndex((o) => o.path === path));
    this.#least = NOTHING * Math.max(0, ...this.#needs.map((i) => system.outputs[i].scale));
    this.#x = new Float64Array(system.places.length);
    this.#w = new Float64Array(system.inputs.length);
    this.#y = new Float64Array(system.outputs.length);
  }

  begin: NonNullable<Watcher['begin']> = (t, x, w) => {
    if (t < this.#limit.from) return;
    this.#plant.system.output(x, w, this.#plant.parameters, this.#y);
    this.#stand(t);
  };

  step: NonNullable<Watcher['step']> = (step, inputs) => {
    if (step.t1 <= this.#limit.from) return;
    const first = Math.max(step.t0, this.#limit.from);
    if (!this.#began) {
      this.#look(step, inputs, first);
      this.#stand(first);
    }
    const span = step.t1 - first;
    const times = Array.from({ length: LOOKS + 1 }, (_, i) =>
      i === LOOKS ? step.t1 : first + (span * i) / LOOKS,
    );
    let from = times[0];
    let best = { at: 0, excess: this.#last };
    for (let i = 1; i <= LOOKS; i++) {
      const to = times[i];
      this.#look(step, inputs, to);
      const excess = this.#excess();
      this.#consider(to);
      if (excess > best.excess) best = { at: i, excess };
      const over = excess > 0;
      if (over !== this.#over) {
        const at = crossing((t) => this.#excessAt(step, inputs, t), from, to, Math.max(1e-9, 1e-12 * to));
        this.#accrue(step, inputs, over ? at : from, over ? to : at);
        this.#turn(at, over);
        this.#over = over;
      } else if (over) this.#accrue(step, inputs, from, to);
      from = to;
      this.#last = excess;
    }
    if (best.excess < this.#sign * (this.#worst.value - this.#limit.value)) return;
    // The peak lies between the neighbours of the best look. At an end of the step there is one only if the curve
    // rises from there into the step.
    const inwards = best.at === 0 ? BESIDE : best.at === LOOKS ? -BESIDE : 0;
    if (inwards !== 0 && this.#excessAt(step, inputs, times[best.at] + inwards * span) <= best.excess) return;
    this.#climb(step, inputs, times[Math.max(0, best.at - 1)], times[Math.min(LOOKS, best.at + 1)]);
  };

  /** How things stand at a moment that no step leads to: at the start, as the limit comes into force, after a jump. */
  #stand(t: number): void {
    this.#last = this.#excess();
    const over = this.#last > 0;
    if (!this.#began) {
      this.#began = true;
      this.#atStart = over;
      if (over) this.#spells.push({ from: t, to: null });
    } else if (over !== this.#over) this.#turn(t, over);
    this.#consider(t);
    this.#over = over;
  }

  report(): LimitReport {
    const output = this.#plant.system.outputs[this.#output];
    return {
      limit: this.#limit,
      path: output.path,
      unit: output.unit,
      atStart: this.#atStart,
      spells: this.#spells,
      outside: this.#outside,
      beyond: this.#carries && this.#sign > 0 ? this.#beyond : null,
      volume: this.#flow >= 0 ? this.#volume : null,
      worst: this.#worst,
      atWorst: this.#atWorst,
    };
  }

  #turn(t: number, over: boolean): void {
    if (over) this.#spells.push({ from: t, to: null });
    else if (this.#spells.length > 0) this.#spells[this.#spells.length - 1].to = t;
  }

  /** How far outside; a purity or a ratio of nothing is inside. */
  #excess(): number {
    if (!this.#defined()) return -Math.abs(this.#limit.value);
    return this.#sign * (this.#y[this.#output] - this.#limit.value);
  }

  #defined(): boolean {
    if (this.#needs.length === 0) return true;
    return this.#needs.reduce((n, i) => n + this.#y[i], 0) > this.#least;
  }

  #look(step: Step, inputs: Inputs, t: number): void {
    step.at(t, this.#x);
    inputs.value(t, this.#w);
    this.#plant.system.output(this.#x, this.#w, this.#plant.parameters, this.#y);
  }

  #excessAt(step: Step, inputs: Inputs, t: number): number {
    this.#look(step, inputs, t);
    return this.#excess();
  }

  /** Time outside and amount beyond over a piece that is wholly outside, by Simpson's rule. */
  #accrue(step: Step, inputs: Inputs, from: number, to: number): void {
    this.#outside += to - from;
    if (this.#flow < 0) return;
    [from, (from + to) / 2, to].forEach((t, i) => {
      const excess = Math.max(0, this.#excessAt(step, inputs, t));
      const flow = this.#y[this.#flow];
      const weight = ((i === 1 ? 4 : 1) / 6) * (to - from);
      this.#beyond += weight * excess * flow;
      this.#volume += weight * flow;
    });
  }

  #consider(t: number): void {
    if (!this.#defined()) return;
    const value = this.#y[this.#output];
    if (!Number.isNaN(this.#worst.value) && this.#sign * value <= this.#sign * this.#worst.value) return;
    this.#worst = { value, time: t };
    this.#atWorst = Float64Array.from(this.#y);
  }

  /** The peak between two looks, by golden section: the curve is smooth and has one there. */
  #climb(step: Step, inputs: Inputs, from: number, to: number): void {
    const golden = (Math.sqrt(5) - 1) / 2;
    let [a, b] = [from, to];
    let c = b - golden * (b - a);
    let d = a + golden * (b - a);
    let fc = this.#excessAt(step, inputs, c);
    let fd = this.#excessAt(step, inputs, d);
    while (b - a > Math.max(1e-3, 1e-6 * (to - from))) {
      if (fc > fd) {
        [b, d, fd] = [d, c, fc];
        c = b - golden * (b - a);
        fc = this.#excessAt(step, inputs, c);
      } else {
        [a, c, fc] = [c, d, fd];
        d = a + golden * (b - a);
        fd = this.#excessAt(step, inputs, d);
      }
    }
    this.#look(step, inputs, (a + b) / 2);
    this.#consider((a + b) / 2);
  }
}
