import { DERIVATIVE_FILTER, type PidSettings } from './spec.ts';

/** What stands beside the feedback part: output = factor·(P + D + I) + added. */
export interface Beside {
  readonly factor: number;
  readonly added: number;
}

/**
 * PI(D) in the ISA standard form, executed now and then, its integral by external reset: it follows what the plant got.
 * With the demand u = factor·(P + D + I) + added reached, I grows by h·Kc·e/Ti (backward Euler); otherwise, with u_act
 * what was reached, I ← (I + (h/Ti)·r)/(1 + h/Ti), r = (u_act − added)/factor − D − (P − Kc·e), so that at a limit it
 * tends there with the time constant Ti and never winds up.
 */
export class Pid {
  readonly #s: PidSettings;
  integral = 0;
  #filtered = 0;
  #derivative = 0;

  constructor(settings: PidSettings) {
    this.#s = settings;
  }

  /** The same, going on by itself. */
  copy(): Pid {
    const own = new Pid(this.#s);
    own.integral = this.integral;
    own.#filtered = this.#filtered;
    own.#derivative = this.#derivative;
    return own;
  }

  /** As if the measurement had been `pv` for long. */
  begin(pv: number): void {
    this.#filtered = pv;
    this.#derivative = 0;
  }

  error(sp: number): number {
    return this.#s.sense * (this.#filtered - sp);
  }

  /** P, with the set point weighted. */
  proportional(sp: number): number {
    return this.#s.gain * this.#s.sense * (this.#filtered - this.#s.setPointWeight * sp);
  }

  get derivative(): number {
    return this.#derivative;
  }

  /** Going automatic without a bump: the integral that makes the demand equal to the output as it is. */
  track(output: number, sp: number, { factor, added }: Beside): void {
    this.integral = (output - added) / factor - this.proportional(sp) - this.#derivative;
  }

  /** At rest at a limit: the integral has come to what the reset leads to. */
  settle(output: number, sp: number, { factor, added }: Beside): void {
    this.integral = (output - added) / factor - this.proportional(sp) + this.#s.gain * this.error(sp);
  }

  /** A new measurement, `h` s after the last. */
  take(pv: number, h: number): void {
    const { filter, derivativeTime: Td, gain, sense } = this.#s;
    const before = this.#filtered;
    this.#filtered = filter > 0 ? before + (h / (filter + h)) * (pv - before) : pv;
    if (Td > 0) {
      const Tn = Td / DERIVATIVE_FILTER;
      this.#derivative = (Tn * this.#derivative + sense * gain * Td * (this.#filtered - before)) / (Tn + h);
    }
  }

  /** The demand after `h` s with the error at hand; `commit` says what was reached of it. */
  demand(sp: number, h: number, { factor, added }: Beside): number {
    const grown = this.integral + (h * this.#s.gain * this.error(sp)) / this.#s.integralTime;
    return factor * (this.proportional(sp) + this.#derivative + grown) + added;
  }

  commit(sp: number, h: number, demand: number, actual: number, beside: Beside): void {
    const share = h / this.#s.integralTime;
    if (actual === demand) this.integral += share * this.#s.gain * this.error(sp);
    else this.integral = (this.integral + share * this.reset(sp, actual, beside)) / (1 + share);
  }

  /** What the integral tends to while the plant gets `actual`. */
  reset(sp: number, actual: number, { factor, added }: Beside): number {
    const weighting = this.proportional(sp) - this.#s.gain * this.error(sp);
    return (actual - added) / factor - this.#derivative - weighting;
  }
}
