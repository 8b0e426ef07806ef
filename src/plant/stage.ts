import { constant } from '../math/expression.ts';
import type { Mixer, Phase, Stage, Train } from '../scenario/scenario.ts';
import { type Book, NEARLY_EMPTY, type Source } from './book.ts';
import type { Chemistry } from './chemistry.ts';
import { difference, overflowed, passed, steadyHoldup } from './kernels.ts';
import { writeLayer } from './layer.ts';
import type { Ref } from './ledger.ts';
import { writeRangeGuards } from './range.ts';
import { area, transferKernel, VANISHING } from './transfer.ts';

/** The flows of a train's two phases: through full vessels they pass at once, so all stages share them. */
export interface Flows {
  readonly aqueous: Ref;
  readonly organic: Ref;
  /** m³/s at time zero: hold-ups, k·a and layer volumes are stated for these. */
  readonly design: { readonly aqueous: number; readonly organic: number };
  /** Whether either flow can change in a run; if not, hold-ups follow from the flows and are no states. */
  readonly move: boolean;
}

/** What a stage offers to its neighbours: mixer places to send to, and the streams that leave its settler. */
export interface WrittenStage {
  readonly inlet: { readonly aqueous: readonly Ref[]; readonly organic: readonly Ref[] };
  readonly outlet: { readonly aqueous: Source; readonly organic: Source };
}

/**
 * One mixer-settler with hydraulics `full`.
 *
 * Mixer, liquid-full and perfectly mixed: dV_o/dt = Q_o − (V_o/V)(Q_a + Q_o), V_a = V − V_o; every component leaves at
 * the rate (m/V)(Q_a + Q_o). The stage keeps its volume of each phase, so the settler takes the difference and a
 * phase leaves the stage at the rate at which it enters it. Layers are n equal well-mixed parts in series.
 */
export function writeStage(
  book: Book,
  train: Train,
  j: number,
  laws: Laws,
  flows: Flows,
  start: { readonly aqueous: readonly number[]; readonly organic: readonly number[] },
): WrittenStage {
  const { ledger } = book;
  const stage: Stage = train.stages[j];
  const path = `${train.name}.${j + 1}`;
  const { mixer, settler } = stage;
  const V = ledger.parameter(`${path}.mixer.volume`, 'm^3', mixer.volume);
  const share = flows.design.organic / (flows.design.aqueous + flows.design.organic);
  const holds = { organic: mixer.volume * share, aqueous: mixer.volume * (1 - share) };

  const Vo = flows.move
    ? movingHoldup(book, path, mixer, holds.organic, V, flows)
    : ledger.signal(steadyHoldup, flows.aqueous, flows.organic, V)[0];
  const volume = { organic: Vo, aqueous: ledger.signal(difference, V, Vo)[0] };
  const least = book.number(mixer.volume * VANISHING);

  const inMixer = {
    aqueous: book.amounts(`${path}.mixer`, 'aqueous', holds.aqueous, start.aqueous),
    organic: book.amounts(`${path}.mixer`, 'organic', holds.organic, start.organic),
  };
  const held: InMixer = { V, volume, least, places: inMixer, share };
  writeTransfer(book, path, mixer, laws, flows, held);
  writeRangeGuards(book, train, path, held);

  const outlet = {} as { aqueous: Source; organic: Source };
  for (const phase of ['aqueous', 'organic'] as const) {
    for (let k = 0; k < book.components(phase); k++)
      book.show(`${path}.mixer.${phase}`, k, book.mixerContentOf(inMixer[phase], volume[phase], least, k));
    const layer = writeLayer(book, path, phase, settler[phase], settler.parts, {
      mixerHolds: volume[phase],
      design: holds[phase],
      V,
      flows,
      from: inMixer[phase],
      start: start[phase],
    });
    for (let k = 0; k < book.components(phase); k++)
      book.show(`${path}.settler.${phase}`, k, book.contentOf(layer, k));
    outlet[phase] = book.sourceOf(layer, flows[phase]);
  }
  return { inlet: inMixer, outlet };
}

function movingHoldup(book: Book, path: string, mixer: Mixer, holds: number, V: Ref, flows: Flows): Ref {
  const Vo = book.place(
    {
      path: `${path}.mixer.organic.volume`,
      unit: 'm^3',
      kind: 'volume',
      scale: mixer.volume * NEARLY_EMPTY,
      floor: 0,
    },
    holds,
  );
  book.ledger.flux(passed, [flows.organic], { from: null, to: Vo });
  book.ledger.flux(overflowed, [flows.aqueous, flows.organic, V, Vo], { from: Vo, to: null });
  return Vo;
}

/** The laws of the train, and where their numbers stand. */
export interface Laws {
  readonly chemistry: Chemistry;
  readonly numbers: readonly Ref[];
}

/** What a mixer holds: volumes, and the places of all components by phase. */
export interface InMixer {
  readonly V: Ref;
  readonly volume: Readonly<Record<Phase, Ref>>;
  readonly least: Ref;
  readonly places: Readonly<Record<Phase, readonly Ref[]>>;
  /** Share of the organic at design. */
  readonly share: number;
}

/**
 * K·a [1/s]: given, or from the stage efficiency E (Murphree) at the design flows by K·a·V/Q = E/(1 − E), exact for
 * a well-mixed mixer, Q being the flow of the side that the efficiency is stated for.
 */
export function designRate(mixer: Mixer, flows: Flows['design']): number {
  const t = mixer.transfer;
  if (t.given === 'ka') return t.ka;
  return (flows[mixer.side] / mixer.volume) * (t.efficiency / (1 - t.efficiency));
}

function writeTransfer(book: Book, path: string, mixer: Mixer, laws: Laws, flows: Flows, m: InMixer): void {
  const { chemistry, numbers } = laws;
  const { ledger, s } = book;
  // A mixer can be stopped even where nothing transfers in it.
  const running = book.input({ path: `${path}.mixer`, unit: '', scale: 1 }, 1);
  if (chemistry.solutes.length === 0) return;
  const ka = ledger.parameter(`${path}.mixer.ka`, '1/s', designRate(mixer, flows.design));
  const { aqueous, organic } = m.places;
  ledger.flux(
    transferKernel(s, mixer, chemistry),
    [
      ...[
        m.volume.aqueous,
        m.volume.organic,
        m.V,
        m.least,
        ka,
        book.number(designArea(mixer, m.share)),
        running,
      ],
      ...s.solutes.flatMap((_, i) => [aqueous[i], organic[i]]),
      ...aqueous.slice(book.solutes),
      ...book.releases.flatMap((row) => row.filter((r): r is Ref => r !== null)),
      ...numbers,
    ],
    ...chemistry.solutes.map((i) => ({ from: aqueous[i], to: organic[i] })),
  );
}

/** g(φ₀): the area function at the design hold-up, `share` of the mixer being organic. */
function designArea(mixer: Mixer, share: number): number {
  const dispersed = mixer.continuity === 'aqueous' ? share : 1 - share;
  const fixed = mixer.transfer.given === 'ka' && mixer.transfer.fixed;
  const g = area(constant(dispersed), constant(1 - dispersed), fixed);
  return g.kind === 'constant' ? g.value : Number.NaN;
}
