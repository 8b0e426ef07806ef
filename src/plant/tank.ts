import { add, constant, mul, sub } from '../math/expression.ts';
import { kernel } from '../math/kernel.ts';
import type { Tank } from '../scenario/scenario.ts';
import { type Book, NEARLY_EMPTY, type Part, type Sink, type Source } from './book.ts';
import { type Totals, totals } from './boundary.ts';
import { otherPhase } from './flow.ts';
import { drained, passed, perVolumeOf, product, rest } from './kernels.ts';
import type { Ref } from './ledger.ts';
import { writeRemovals } from './removal.ts';

/** A pump that ran its tank empty starts again when the tank holds this share of its volume. */
const RESTART = 0.05;

const margin = kernel('margin', ['value', 'bound'], (v, bound) => sub(v, bound));
const together = kernel('together', ['a', 'b', 'bound'], (a, b, bound) => sub(add(a, b), bound));
/** What a full tank cannot keep; below zero the spilling is over. */
const spilling = kernel('spilling', ['overflowing', 'in', 'out'], (on, a, b) => mul(on, sub(a, b)));
const one = kernel('one', ['any'], (a) => mul(a, constant(1)));

/**
 * A well-mixed tank on a pump. What its streams carry of the other phase settles as bottoms, but for a stated share
 * that is passed on. Its level is a state only where inflow and pump can differ.
 */
export class TankWriter {
  readonly volume: Ref | null;
  readonly bottomsVolume: Ref | null;
  readonly lost: Totals | null;
  /** What is taken out of the tank. */
  readonly removed: Totals | null;
  readonly flow: Ref;
  readonly #book: Book;
  readonly #t: Tank;
  readonly #part: Part;
  readonly #bottoms: readonly Ref[] | null;
  readonly #passes: Ref | null;
  readonly #dry: Ref | null;

  constructor(book: Book, t: Tank, flow: Ref, dry: Ref | null, levelMoves: boolean, carries: boolean) {
    const { ledger } = book;
    this.#book = book;
    this.#t = t;
    this.flow = flow;
    this.#dry = dry;
    const level = (name: string, held: number): Ref =>
      book.place(
        { path: name, unit: 'm^3', kind: 'volume', scale: t.volume * NEARLY_EMPTY, floor: 0 },
        held,
        'hold',
      );
    this.volume = levelMoves ? level(`${t.name}.volume`, t.held) : null;
    const V = this.volume ?? ledger.parameter(`${t.name}.held`, 'm^3', t.held);
    const places = book.amounts(
      t.name,
      t.phase,
      t.held,
      t.content,
      1,
      this.volume ? { followsVolume: this.volume.index } : undefined,
    );
    const perVolume = book.signal(perVolumeOf, V, book.number(t.volume * NEARLY_EMPTY));
    this.#part = { phase: t.phase, path: t.name, places, perVolume };
    ledger.output({ path: `${t.name}.volume`, unit: 'm^3', scale: t.volume }, one, V);
    for (let k = 0; k < book.components(t.phase); k++) book.show(t.name, k, book.contentOf(this.#part, k));
    const other = otherPhase(t.phase);
    this.bottomsVolume = carries ? level(`${t.name}.bottoms.volume`, 0) : null;
    this.#bottoms = carries
      ? book.amounts(
          `${t.name}.bottoms`,
          other,
          t.volume,
          book.typical.map(() => 0),
          0,
          'hold',
        )
      : null;
    if (this.bottomsVolume) book.showValue(`${t.name}.bottoms`, 'm^3', t.volume * 0.01, this.bottomsVolume);
    this.#passes = carries && t.passes > 0 ? book.number(t.passes) : null;
    this.lost = levelMoves ? totals(book, `${t.name} overflow`, t.phase, 'out') : null;
    this.removed = writeRemovals(book, t, this.#part, V, flow);
  }

  /** Where what enters goes; `onward` is where the tank's own stream goes. */
  sink(onward: () => Sink): Sink {
    const main = [{ share: null, places: this.#part.places, volume: this.volume }];
    const other = otherPhase(this.#t.phase);
    const bottoms = this.#bottoms ? [{ share: null, places: this.#bottoms, volume: this.bottomsVolume }] : [];
    if (this.#passes === null) return { [this.#t.phase]: main, [other]: bottoms } as unknown as Sink;
    const share = this.#passes;
    const stays = this.#book.signal(rest, share);
    const past = this.#book.portionOf(onward(), share)[other];
    return {
      [this.#t.phase]: main,
      [other]: [...bottoms.map((i) => ({ ...i, share: stays })), ...past],
    } as unknown as Sink;
  }

  source(): Source {
    return {
      send: (to) => this.#book.send(this.#part, this.flow, this.volume, to),
      content: (k) => this.#book.contentOf(this.#part, k),
    };
  }

  /** Running dry, restart, overflow and its end: each is an event that is located and reported. */
  events(inflow: Ref, makeUp: Ref | null): void {
    if (this.volume === null || this.lost === null || this.#dry === null) return;
    const book = this.#book;
    const { ledger } = book;
    const t = this.#t;
    const inlet = makeUp === null ? inflow : book.signal(both, inflow, makeUp);
    const overflowing = book.input({ path: `${t.name}.overflowing`, unit: '', scale: 1 }, 0);
    const spill = book.signal(spilling, overflowing, inlet, this.flow);
    const rate = book.signal(product, spill, this.#part.perVolume);
    this.#part.places.forEach((m, k) => {
      ledger.flux(drained, [rate, m], { from: m, to: this.lost?.components[k] ?? null });
    });
    ledger.flux(passed, [spill], { from: this.volume, to: this.lost.volume });
    const guard = (
      name: string,
      direction: 1 | -1,
      message: string,
      set: readonly [number, number],
    ): Parameters<typeof ledger.guard>[0] => ({
      name: `${t.name} ${name}`,
      direction,
      message: `${t.name} ${message}`,
      fromStart: true,
      action: { set: [set] },
    });
    const bound = (share: number): Ref => book.number(t.volume * share);
    const dry = this.#dry.index;
    const zero = book.number(0);
    ledger.guard(
      guard('empty', -1, 'has run empty; its pump stops', [dry, 0]),
      margin,
      this.volume,
      bound(NEARLY_EMPTY),
    );
    ledger.guard(
      guard('refilled', 1, 'holds enough again; its pump restarts', [dry, 1]),
      margin,
      this.volume,
      bound(RESTART),
    );
    ledger.guard(
      guard('full', 1, 'is full and overflows', [overflowing.index, 1]),
      together,
      this.volume,
      this.bottomsVolume ?? zero,
      bound(1),
    );
    ledger.guard(
      guard('spilling ends', -1, 'no longer overflows', [overflowing.index, 0]),
      margin,
      spill,
      zero,
    );
  }
}

const both = kernel('both', ['a', 'b'], (a, b) => add(a, b));
