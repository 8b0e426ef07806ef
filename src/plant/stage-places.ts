import type { Phase, Stage, Train } from '../scenario/scenario.ts';
import { type Book, NEARLY_EMPTY } from './book.ts';
import type { Both, StageDesign } from './design.ts';
import { forBoth, type Of, PHASES } from './flow.ts';
import type { Ref } from './ledger.ts';

/** What a stage holds: the places of its amounts, and of those volumes that are states. */
export interface StagePlaces {
  readonly path: string;
  readonly mixer: Of<readonly Ref[]>;
  readonly band: Of<readonly Ref[]> | null;
  /** Part after part. */
  readonly layers: Of<readonly (readonly Ref[])[]>;
  readonly volumes: {
    /** Full vessels that move: the organic in the mixer. With weirs: both. */
    readonly mixer: { readonly aqueous: Ref | null; readonly organic: Ref | null };
    readonly band: Of<Ref> | null;
    readonly layer: Of<Ref> | null;
  };
}

/** Share of its design volume that an "empty" vessel still holds: a heel. */
export const HEEL = 0.01;

/** Writes the places of a stage, filled as the start asks for. */
export function stagePlaces(
  book: Book,
  train: Train,
  j: number,
  stage: Stage,
  d: StageDesign,
  start: Of<readonly number[]>,
  moves: boolean,
): StagePlaces {
  const path = `${train.name}.${j + 1}`;
  const weirs = train.hydraulics === 'weirs';
  const held = book.s.start === 'empty' && weirs ? HEEL : 1;
  const amounts = (name: string, phase: Phase, volume: number): Ref[] =>
    book.amounts(`${path}.${name}`, phase, volume, start[phase], held);
  const volume = (name: string, phase: Phase, v: number, size: number): Ref =>
    book.place(
      {
        path: `${path}.${name}.${phase}.volume`,
        unit: 'm^3',
        kind: 'volume',
        scale: size * NEARLY_EMPTY,
        floor: 0,
      },
      v * held,
    );
  const hasBand = stage.settler.band !== null;
  const size = (b: Both): number => b.aqueous + b.organic;
  return {
    path,
    mixer: {
      aqueous: amounts('mixer', 'aqueous', d.mixer.aqueous),
      organic: amounts('mixer', 'organic', d.mixer.organic),
    },
    band: hasBand
      ? {
          aqueous: amounts('band', 'aqueous', d.band.aqueous),
          organic: amounts('band', 'organic', d.band.organic),
        }
      : null,
    layers: Object.fromEntries(
      PHASES.map((phase) => [
        phase,
        Array.from({ length: stage.settler.parts }, (_, k) =>
          amounts(`settler.${k + 1}`, phase, d.layer[phase] / stage.settler.parts),
        ),
      ]),
    ) as unknown as Of<Ref[][]>,
    volumes: {
      mixer: {
        aqueous: weirs ? volume('mixer', 'aqueous', d.mixer.aqueous, stage.mixer.volume) : null,
        organic:
          weirs || (moves && stage.settler.parts > 0)
            ? volume('mixer', 'organic', d.mixer.organic, stage.mixer.volume)
            : null,
      },
      band: hasBand ? forBoth((phase) => volume('band', phase, d.band[phase], size(d.band))) : null,
      layer: weirs ? forBoth((phase) => volume('settler', phase, d.layer[phase], d.layer[phase])) : null,
    },
  };
}
