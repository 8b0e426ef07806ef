import type { Loop } from './loops.ts';
import type { Problem } from './refusal.ts';
import type { Path, Scenario } from './scenario.ts';
import { show } from './show.ts';

/** Who moves what: every quantity has one owner. */
export class Ownership {
  readonly #s: Scenario;
  readonly #loops: readonly Loop[];
  readonly #problems: Problem[];

  constructor(s: Scenario, loops: readonly Loop[], problems: Problem[]) {
    this.#s = s;
    this.#loops = loops;
    this.#problems = problems;
  }

  check(): void {
    this.#twice();
    this.#names();
  }

  #twice(): void {
    this.#loops.forEach((l, i) => {
      const first = this.#loops.findIndex((o) => o.move.quantity === l.move.quantity);
      if (first === i) return;
      const both = [this.#loops[first], l];
      both.forEach((one, k) => {
        const message = `${show(l.move.quantity)} is moved by ${one.name} and by ${both[1 - k].name}; a move has one owner; take one of them out`;
        this.#problems.push({ path: ['loops', one.name, 'move'], message });
      });
    });
    for (const l of this.#loops) {
      const other = this.#loops.find((o) => o !== l && o.move.quantity === l.move.over);
      if (other)
        this.#problems.push({
          path: ['loops', l.name, 'move'],
          message: `the flow ${show(l.move.over)} that the ratio is over is itself moved by ${other.name}; take the ratio over a flow that no loop moves`,
        });
      const inner = this.#loops.find((o) => l.move.kind === 'set point' && o.name === l.move.quantity);
      if (inner?.move.kind === 'set point')
        this.#problems.push({
          path: ['loops', l.name, 'move'],
          message: `${inner.name} itself moves a set point; a cascade has two loops; let it move a flow`,
        });
    }
  }

  /** A path begins with a name, so a loop must not share one with anything else. */
  #names(): void {
    const s = this.#s;
    const taken = new Set([...s.feeds, ...s.tanks, ...s.trains, ...s.batches].map((q) => q.name));
    for (const t of s.trains) for (const n of [t.aqueous.to, t.organic.to]) taken.add(n);
    for (const { name } of this.#loops) {
      const mark = /[.,:#"]|->/.exec(name)?.[0];
      if (mark !== undefined || taken.has(name))
        this.#problems.push({
          path: ['loops', name],
          message:
            mark !== undefined
              ? `a name must not hold '${mark}'`
              : `'${name}' is also something else; rename the loop`,
          atKey: true,
        });
    }
  }
}

/** A change as it is written. */
interface Written {
  readonly change: string;
  readonly put?: string | undefined;
  readonly over?: { readonly value: number } | undefined;
  readonly follow?: object | undefined;
}

/**
 * Judges a change, of an upset or of an operator, by what loops own: what a loop in automatic moves is changed through the
 * loop, or the loop is put in manual beside it. Complains in place.
 */
export function checkOwner(u: Written, at: Path, loops: readonly Loop[], problems: Problem[]): void {
  const complain = (message: string, ...key: string[]): void => {
    problems.push({ path: [...at, ...key], message });
  };
  const owner = loops.find((l) => l.move.kind !== 'set point' && l.move.quantity === u.change);
  const put = u.put === undefined ? null : /^(.+?)\s+in\s+manual$/.exec(u.put.trim())?.[1];
  if (owner === undefined) {
    if (put !== null)
      complain(
        loops.length === 0
          ? 'there is no loop to be put anywhere; take it out'
          : `no loop moves ${show(u.change)}; put is for changes of what a loop moves; take it out`,
        'put',
      );
    checkOwn(u, loops, complain);
    return;
  }
  if (put === undefined || (put !== null && put !== owner.name)) {
    complain(`expected '${owner.name} in manual', got ${show(u.put)}`, 'put');
    return;
  }
  if (put !== null || !owner.controller.auto) return;
  complain(
    `${show(u.change)} is moved by ${owner.name} in automatic; write put: ${owner.name} in manual, or change ${show(`${owner.name}.set point`)}, its low or its high`,
    'change',
  );
  problems.push({
    path: ['loops', owner.name, 'move'],
    message: `moves ${show(u.change)}, which ${at[0] === 'upsets' ? 'an upset' : `${String(at[0]).replace(/s$/, '')} ${show(at[1])}`} changes as well; see there`,
  });
}

/** A change about a loop itself. */
function checkOwn(
  u: Written,
  loops: readonly Loop[],
  complain: (message: string, ...key: string[]) => void,
): void {
  const led = loops.find((l) => u.change === `${l.name}.set point`);
  const leader = led && loops.find((l) => l.move.kind === 'set point' && l.move.quantity === led.name);
  if (leader)
    complain(
      `the set point of ${led.name} is moved by ${leader.name}; change the set point of that one instead`,
      'change',
    );
  const limit = loops.some((l) => u.change === `${l.name}.low` || u.change === `${l.name}.high`);
  for (const key of ['over', 'follow'] as const)
    if (limit && u[key] !== undefined)
      complain('a limit of an output changes at once: state to or by, and no ramp', key);
}
