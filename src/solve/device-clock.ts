import type { Device, Drive } from './device.ts';
import type { Inputs } from './inputs.ts';
import type { Step } from './integrator.ts';
import type { F, System } from './system.ts';

/** Moments closer than this many units in the last place are one moment. */
const SAME = 16 * Number.EPSILON;
/** Moves of one device at one moment; more are a circle. */
const MOST_AT_ONCE = 1000;

/** Lets devices read and move as the time passes over their moments. */
export class DeviceClock {
  readonly #devices: readonly Device[];
  readonly #system: System;
  readonly #p: F;
  readonly #inputs: Inputs;
  readonly #x: F;
  readonly #w: F;
  readonly #y: F;
  readonly #drive: Drive;
  /** Moves that devices have made, whether or not they changed anything. */
  moves = 0;

  constructor(devices: readonly Device[], system: System, p: F, inputs: Inputs) {
    this.#devices = devices;
    this.#system = system;
    this.#p = p;
    this.#inputs = inputs;
    this.#x = new Float64Array(system.places.length);
    this.#w = new Float64Array(system.inputs.length);
    this.#y = new Float64Array(system.outputs.length);
    this.#drive = (input, t, value, slope) => inputs.drive(input, t, value, slope);
  }

  begin(t: number, x: F): void {
    for (const d of this.#devices) {
      this.#look(t, x);
      d.begin(t, this.#y, this.#w, this.#drive);
    }
  }

  /** The first moment before `end` at which an input may move. */
  until(end: number): number {
    let first = end;
    for (const d of this.#devices) first = Math.min(first, d.nextMove());
    return first;
  }

  /** All that is due at the beginning of a stretch. */
  due(t: number, x: F): void {
    this.#inputs.forget(t);
    const late = t + SAME * Math.abs(t);
    for (const d of this.#devices) {
      while (d.nextRead() <= late) this.#read(d, t, x);
      for (let n = 0; d.nextMove() <= late; n++) {
        if (n > MOST_AT_ONCE) throw new RangeError(`${d.name} does not come past ${t} s`);
        // A moment that rounding puts a hair later is still that moment to the device.
        const at = Math.max(t, d.nextMove());
        this.#look(t, x);
        this.moves += 1;
        d.move(at, this.#y, this.#w, this.#drive);
        while (d.nextRead() <= late) this.#read(d, t, x);
      }
    }
  }

  /** Readings inside a step. */
  step(step: Step): void {
    if (this.#devices.length > 0) this.#readings(step);
  }

  #readings(step: Step): void {
    const at = (t: number): F => {
      step.at(t, this.#x);
      this.#look(t, this.#x);
      return this.#y;
    };
    for (const d of this.#devices) {
      let from = step.t0;
      for (let next = d.nextRead(); next <= step.t1; next = d.nextRead()) {
        d.pass?.(from, next, at);
        from = Math.max(from, next);
        at(next);
        d.read(next, this.#y, this.#w, this.#drive);
      }
      if (from < step.t1) d.pass?.(from, step.t1, at);
    }
  }

  #read(d: Device, t: number, x: F): void {
    this.#look(t, x);
    d.read(Math.max(t, d.nextRead()), this.#y, this.#w, this.#drive);
  }

  #look(t: number, x: F): void {
    this.#inputs.value(t, this.#w);
    this.#system.output(x, this.#w, this.#p, this.#y);
  }
}
