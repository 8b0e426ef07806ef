import { add, div, max, mul } from '../math/expression.ts';
import { type Kernel, kernel } from '../math/kernel.ts';
import type { Stream } from '../scenario/network.ts';
import type { Phase } from '../scenario/scenario.ts';
import type { Book } from './book.ts';

/** kg/m³ of all solutes together below which a stream has no purity to speak of. */
const NOTHING = 1e-9;
const quotient = kernel('quotient', ['one', 'other', 'least'], (a, b, least) => div(a, max(b, least)));

const kernels = new Map<number, Kernel>();

/** Share of one solute in all n solutes by mass, in %; species do not count. */
function purity(n: number): Kernel {
  const found = kernels.get(n);
  if (found) return found;
  const names = Array.from({ length: n }, (_, i) => `content ${i}`);
  const made = kernel(`purity of ${n}`, ['own', ...names], (own, ...all) =>
    div(mul(100, own), max(add(...all), NOTHING)),
  );
  kernels.set(n, made);
  return made;
}

/** Purities of streams, tanks and batches, and the ratios that limits are put on. */
export function writeStreamFigures(book: Book, streams: readonly Stream[]): void {
  const { s, ledger } = book;
  const value = (path: string): ReturnType<Book['signal']> => {
    const i = ledger.outputs.findIndex((o) => o.path === path);
    const { kernel: k, args } = ledger.outputEntries[i];
    return book.signal(k, ...args);
  };
  if (s.solutes.length > 1) {
    const both: readonly Phase[] = ['aqueous', 'organic'];
    const names = [
      ...streams.map((q) => q.name),
      ...s.tanks.map((t) => t.name),
      ...s.batches.flatMap((b) => both.map((phase) => `${b.name} ${phase}`)),
    ];
    for (const name of names) {
      const contents = s.solutes.map((n) => value(`${name}.${n}`));
      s.solutes.forEach((n, i) => {
        ledger.output(
          { path: `${name}.purity of ${n}`, unit: '%', scale: 100 },
          purity(contents.length),
          contents[i],
          ...contents,
        );
      });
    }
  }
  for (const l of s.limits) {
    const path = `${l.stream}.${l.quantity}`;
    if (ledger.outputs.some((o) => o.path === path)) continue;
    const [one, other] = path.split(' / ');
    const least = ledger.outputs.find((o) => o.path === other)?.scale ?? 1;
    ledger.output(
      { path, unit: '', scale: l.value },
      quotient,
      value(one),
      value(other),
      book.number(1e-9 * least),
    );
  }
}
