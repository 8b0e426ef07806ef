import type { Phase } from '../scenario/scenario.ts';
import { type Book, NEARLY_EMPTY, type Part } from './book.ts';
import { overflowed, partFlow, perPart } from './kernels.ts';
import type { Ref } from './ledger.ts';
import type { Flows } from './stage.ts';

/** What a layer needs to know of its stage. */
interface Layer {
  readonly mixerHolds: Ref;
  /** m³ of this phase in the mixer at design. */
  readonly design: number;
  readonly V: Ref;
  readonly flows: Flows;
  readonly from: readonly Ref[];
  readonly start: readonly number[];
}

/** A settler layer: from the mixer overflow to the last part, which is what leaves. Returns the last part. */
export function writeLayer(
  book: Book,
  path: string,
  phase: Phase,
  volume: number,
  parts: number,
  l: Layer,
): Part {
  const { ledger } = book;
  const { flows } = l;
  const n = book.number(parts);
  const stageHolds = ledger.parameter(`${path}.${phase}.volume`, 'm^3', volume + l.design);
  const [perVolume] = ledger.signal(perPart, stageHolds, l.mixerHolds, n, book.number(volume * NEARLY_EMPTY));
  let last: Part | null = null;
  for (let k = 1; k <= parts; k++) {
    const name = `${path}.settler.${k}`;
    const places = book.amounts(name, phase, volume / parts, l.start);
    if (last === null)
      l.from.forEach((m, i) => {
        ledger.flux(overflowed, [flows.aqueous, flows.organic, l.V, m], { from: m, to: places[i] });
      });
    else {
      const between = flows.move
        ? ledger.signal(
            partFlow,
            l.mixerHolds,
            l.V,
            flows.aqueous,
            flows.organic,
            flows[phase],
            book.number((k - 1) / parts),
          )[0]
        : flows[phase];
      book.sourceOf(last, between).send(places);
    }
    last = { phase, path: name, places, perVolume };
  }
  return last as Part;
}
