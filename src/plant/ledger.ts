import type { Execution, Kernel } from '../math/kernel.ts';
import type { Guard, Named, Place, SteadyRow, System } from '../solve/system.ts';
import { compile } from './compile.ts';

/** Where a value stands: a state x, an input w, a parameter p, or a signal z computed from these. */
export interface Ref {
  readonly space: 'x' | 'w' | 'p' | 'z';
  readonly index: number;
}

/** One use of a kernel. `targets` are indices in the space that its kind of entry writes to (−1: nowhere). */
export interface Entry {
  readonly kernel: Kernel;
  readonly args: readonly Ref[];
  readonly targets: readonly number[];
}

/** What a flux moves between: a place, or null for the world outside the balance. */
export interface Move {
  readonly from: Ref | null;
  readonly to: Ref | null;
}

/**
 * The book in which the plant is written down: places that hold something, and fluxes that leave one place and
 * enter another. A flux is subtracted and added as the very same number, so the sum over the places it joins
 * cannot change but by what crosses the boundary, and the boundary totals are places as well.
 */
export class Ledger {
  readonly places: Place[] = [];
  readonly steady: SteadyRow[] = [];
  readonly inputs: Named[] = [];
  readonly parameters: Named[] = [];
  readonly parameterValues: number[] = [];
  readonly outputs: Named[] = [];
  readonly guards: Guard[] = [];
  readonly signals: Entry[] = [];
  readonly fluxes: Entry[] = [];
  readonly outputEntries: Entry[] = [];
  readonly guardEntries: Entry[] = [];
  readonly conserved: { name: string; places: readonly number[] }[] = [];
  #signalCount = 0;

  place(spec: Place, steady: SteadyRow = spec.kind === 'total' ? 'hold' : 'free'): Ref {
    this.steady.push(steady);
    return { space: 'x', index: this.places.push(spec) - 1 };
  }

  input(spec: Named): Ref {
    return { space: 'w', index: this.inputs.push(spec) - 1 };
  }

  parameter(path: string, unit: string, value: number): Ref {
    this.parameterValues.push(value);
    const scale = Math.abs(value) || 1;
    return { space: 'p', index: this.parameters.push({ path, unit, scale }) - 1 };
  }

  /** Values that several balances read, computed before them. One ref for each output of the kernel. */
  signal(kernel: Kernel, ...args: Ref[]): Ref[] {
    const targets = kernel.outputs.map((_, i) => this.#signalCount + i);
    this.#signalCount += targets.length;
    this.signals.push({ kernel, args, targets });
    return targets.map((index) => ({ space: 'z', index }));
  }

  get signalCount(): number {
    return this.#signalCount;
  }

  /** Output i of the kernel is what moves along `moves[i]`, per second. */
  flux(kernel: Kernel, args: readonly Ref[], ...moves: Move[]): void {
    const at = (r: Ref | null): number => (r === null ? -1 : r.index);
    this.fluxes.push({ kernel, args, targets: moves.flatMap((m) => [at(m.from), at(m.to)]) });
  }

  output(spec: Named, kernel: Kernel, ...args: Ref[]): number {
    const index = this.outputs.push(spec) - 1;
    this.outputEntries.push({ kernel, args, targets: [index] });
    return index;
  }

  guard(spec: Guard, kernel: Kernel, ...args: Ref[]): void {
    this.guardEntries.push({ kernel, args, targets: [this.guards.push(spec) - 1] });
  }

  conserve(name: string, places: readonly number[]): void {
    this.conserved.push({ name, places });
  }

  build(execution: Execution | null = null): System {
    return compile(this, execution);
  }
}
