import type { Loop } from './loops.ts';
import type { Problem } from './refusal.ts';
import type { Path, Scenario } from './scenario.ts';
import type { RawScenario } from './schema.ts';
import { show } from './show.ts';

/** Who moves what: every quantity has one owner at a time. */
export class Ownership {
  readonly #raw: RawScenario;
  readonly #s: Scenario;
  readonly #loops: readonly Loop[];
  readonly #problems: Problem[];

  constructor(raw: RawScenario, s: Scenario, loops: readonly Loop[], problems: Problem[]) {
    this.#raw = raw;
    this.#s = s;
    this.#loops = loops;
    this.#problems = problems;
  }

  loops(): Loop[] {
    this.#twice();
    this.#names();
    const out = this.#loops.map((): Loop['outOfService'][number][] => []);
    for (const [i, u] of (this.#raw.upsets ?? []).entries()) this.#upset(u, i, out);
    return this.#loops.map((l, k) => ({ ...l, outOfService: out[k] }));
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
      if (inner && inner.setPoint.length > 0)
        this.#problems.push({
          path: ['loops', l.name, 'move'],
          message: `the set point of ${inner.name} is moved by this loop, and by upsets; change the set point of this one instead`,
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

  #upset(
    u: NonNullable<RawScenario['upsets']>[number],
    i: number,
    out: Loop['outOfService'][number][][],
  ): void {
    const owner = this.#loops.findIndex((l) => l.move.kind !== 'set point' && l.move.quantity === u.change);
    const at: Path = ['upsets', i];
    const put = u.put === undefined ? null : /^(.+?)\s+in\s+manual$/.exec(u.put.trim())?.[1];
    if (owner < 0) {
      if (put !== null)
        this.#problems.push({
          path: [...at, 'put'],
          message: `no loop moves ${show(u.change)}; put is for changes of what a loop moves; take it out`,
        });
      return;
    }
    const loop = this.#loops[owner];
    if (put === undefined || (put !== null && put !== loop.name)) {
      this.#problems.push({
        path: [...at, 'put'],
        message: `expected '${loop.name} in manual', got ${show(u.put)}`,
      });
      return;
    }
    if (put === null && loop.controller.auto) {
      this.#problems.push({
        path: [...at, 'change'],
        message: `${show(u.change)} is moved by ${loop.name} in automatic; write put: ${loop.name} in manual, or change ${show(`${loop.name}.set point`)}`,
      });
      this.#problems.push({
        path: ['loops', loop.name, 'move'],
        message: `moves ${show(u.change)}, which an upset changes as well; see there`,
      });
      return;
    }
    const lasts = u.for?.value;
    out[owner].push({
      from: u.at.value,
      to: lasts === undefined ? null : u.at.value + lasts + (u.over?.value ?? 0),
      words: put === null ? `${loop.name} out of service` : `${loop.name} in manual`,
    });
  }
}
