import { constant, mul, sub } from '../math/expression.ts';
import { kernel } from '../math/kernel.ts';
import type { Tank } from '../scenario/scenario.ts';
import { type Book, NEARLY_EMPTY, type Part, type Source } from './book.ts';
import { type Totals, totals } from './boundary.ts';
import { perVolumeOf, pumped, same } from './kernels.ts';
import type { Ref } from './ledger.ts';

/** A pump that ran its tank empty starts again when the tank holds this share of its volume. */
const RESTART = 0.05;

/** Spilled amount: overflowing·(inflow − outflow)·m/V. */
const spilledAmount = kernel('spilled amount', ['on', 'in', 'out', 'amount', 'perVolume'], (on, a, b, m, i) =>
  mul(on, sub(a, b), m, i),
);
const spilledVolume = kernel('spilled volume', ['on', 'in', 'out'], (on, a, b) => mul(on, sub(a, b)));
const margin = kernel('margin', ['value', 'bound'], (v, bound) => sub(v, bound));
/** Positive while a full tank still gains; below zero the spilling is over. */
const gains = kernel('gains', ['on', 'in', 'out'], (on, a, b) => mul(on, sub(a, b)));
const one = kernel('one', ['any'], (a) => mul(a, constant(1)));

export interface WrittenTank {
  readonly source: Source;
  readonly inlet: readonly Ref[];
  /** The place of its volume, where its level can move. */
  readonly volume: Ref | null;
  readonly lost: Totals | null;
}

/** Places and pump of a tank. Its level is a state only where inflow and pump can differ. */
export function writeTank(
  book: Book,
  t: Tank,
  passing: Ref | null,
  levelMoves: boolean,
  content: readonly number[],
): WrittenTank {
  const { ledger } = book;
  const set =
    t.flow === null ? null : book.input({ path: `${t.name}.flow`, unit: 'm^3/s', scale: t.flow }, t.flow);
  if (!levelMoves) {
    const inlet = book.amounts(t.name, t.phase, t.held, content);
    const V = ledger.parameter(`${t.name}.held`, 'm^3', t.held);
    const [perVolume] = ledger.signal(perVolumeOf, V, book.number(t.volume * NEARLY_EMPTY));
    const part: Part = { phase: t.phase, path: t.name, places: inlet, perVolume };
    ledger.output({ path: `${t.name}.volume`, unit: 'm^3', scale: t.volume }, one, V);
    showContent(book, t, part);
    return { source: book.sourceOf(part, (set ?? passing) as Ref), inlet, volume: null, lost: null };
  }
  const volume = book.place(
    { path: `${t.name}.volume`, unit: 'm^3', kind: 'volume', scale: t.volume * NEARLY_EMPTY, floor: 0 },
    t.held,
    'hold',
  );
  const inlet = book.amounts(t.name, t.phase, t.held, content, { followsVolume: volume.index });
  const [perVolume] = ledger.signal(perVolumeOf, volume, book.number(t.volume * NEARLY_EMPTY));
  const running = book.input({ path: `${t.name}.pump`, unit: '', scale: 1 }, 1);
  const [flow] = ledger.signal(pumped, set as Ref, running);
  const part: Part = { phase: t.phase, path: t.name, places: inlet, perVolume };
  ledger.output({ path: `${t.name}.volume`, unit: 'm^3', scale: t.volume }, same, volume);
  showContent(book, t, part);
  const lost = totals(book, `${t.name} overflow`, t.phase, 'out');
  return { source: book.sourceOf(part, flow), inlet, volume, lost };
}

function showContent(book: Book, t: Tank, part: Part): void {
  for (let k = 0; k < book.components(t.phase); k++) book.show(t.name, k, book.contentOf(part, k));
}

/** Running dry, restart, overflow and its end: each is an event that is located and reported. */
export function writeTankEvents(book: Book, t: Tank, w: WrittenTank, inflow: Ref): void {
  if (w.volume === null || w.lost === null) return;
  const { ledger } = book;
  const mode = (path: string): Ref => book.input({ path, unit: '', scale: 1 }, 0);
  const overflowing = mode(`${t.name}.overflowing`);
  const pump = ledger.inputs.findIndex((i) => i.path === `${t.name}.pump`);
  const out = w.source.flow;
  const [perVolume] = ledger.signal(perVolumeOf, w.volume, book.number(t.volume * NEARLY_EMPTY));
  w.inlet.forEach((m, k) => {
    const move = { from: m, to: w.lost?.components[k] ?? null };
    ledger.flux(spilledAmount, [overflowing, inflow, out, m, perVolume], move);
  });
  ledger.flux(spilledVolume, [overflowing, inflow, out], { from: w.volume, to: w.lost.volume });
  const at = (
    name: string,
    direction: 1 | -1,
    message: string,
    set: [number, number],
  ): Parameters<typeof ledger.guard>[0] => ({
    name: `${t.name} ${name}`,
    direction,
    message: `${t.name} ${message}`,
    action: { set: [set] },
  });
  const bound = (share: number): Ref => book.number(t.volume * share);
  ledger.guard(
    at('empty', -1, 'has run empty; its pump stops', [pump, 0]),
    margin,
    w.volume,
    bound(NEARLY_EMPTY),
  );
  ledger.guard(
    at('refilled', 1, 'holds enough again; its pump restarts', [pump, 1]),
    margin,
    w.volume,
    bound(RESTART),
  );
  ledger.guard(at('full', 1, 'is full and overflows', [overflowing.index, 1]), margin, w.volume, bound(1));
  ledger.guard(
    at('spilling ends', -1, 'no longer overflows', [overflowing.index, 0]),
    gains,
    overflowing,
    inflow,
    out,
  );
}
