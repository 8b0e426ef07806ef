import { constant } from '../math/expression.ts';
import type { Mixer } from '../scenario/scenario.ts';
import type { Book } from './book.ts';
import type { StageDesign } from './design.ts';
import type { Of } from './flow.ts';
import { past } from './kernels.ts';
import type { Ref } from './ledger.ts';
import { agitatorFigures, stirredArgs } from './stirred.ts';
import type { Laws } from './train.ts';
import { area, rateArgs, transferKernel } from './transfer.ts';

interface Held {
  readonly mixer: Of<Ref>;
  readonly least: Ref;
  readonly continuity: Ref;
}

/**
 * K·a [1/s]: given, or from the stage efficiency E (Murphree) at the design flows by K·a·V/Q = E/(1 − E), exact for
 * a well-mixed mixer, Q being all that enters the mixer of the phase that the efficiency is stated for.
 */
export function designRate(mixer: Mixer, entering: Of<number>): number {
  const t = mixer.transfer;
  if (t.given === 'ka') return t.ka;
  if (t.given === 'impeller') return Number.NaN;
  return (entering[mixer.side] / mixer.volume) * (t.efficiency / (1 - t.efficiency));
}

/** Transfer between the phases of one mixer, by whatever model it has. */
export function writeTransfer(
  book: Book,
  path: string,
  mixer: Mixer,
  laws: Laws,
  d: Pick<StageDesign, 'mixer' | 'entering'>,
  places: Of<readonly Ref[]>,
  held: Held,
): void {
  const { chemistry, numbers } = laws;
  const { ledger, s } = book;
  // A mixer can be stopped even where nothing transfers in it.
  const running = book.running(path);
  const base = [held.mixer.aqueous, held.mixer.organic, held.least, held.continuity, running];
  const own =
    mixer.transfer.given === 'impeller' ? agitator(book, path, mixer, base) : rate(book, path, mixer, d);
  if (chemistry.solutes.length === 0) return;
  const { aqueous, organic } = places;
  const diffusivities =
    mixer.transfer.given === 'impeller' ? chemistry.solutes.flatMap((i) => book.diffusivities(i)) : [];
  const names =
    mixer.transfer.given === 'impeller'
      ? [...stirredArgs, ...chemistry.solutes.flatMap((i) => [`aqueous D ${i}`, `organic D ${i}`])]
      : rateArgs;
  ledger.flux(
    transferKernel(s, mixer, chemistry, names),
    [
      ...base,
      ...own,
      ...diffusivities,
      ...s.solutes.flatMap((_, i) => [aqueous[i], organic[i]]),
      ...aqueous.slice(book.solutes),
      ...book.releases.flatMap((row) => row.filter((r): r is Ref => r !== null)),
      ...numbers,
    ],
    ...chemistry.solutes.map((i) => ({ from: aqueous[i], to: organic[i] })),
  );
}

function rate(book: Book, path: string, mixer: Mixer, d: Pick<StageDesign, 'mixer' | 'entering'>): Ref[] {
  const share = d.mixer.organic / (d.mixer.organic + d.mixer.aqueous);
  return [
    book.ledger.parameter(`${path}.mixer.ka`, '1/s', designRate(mixer, d.entering)),
    book.number(designArea(mixer, share)),
  ];
}

/** g(φ₀): the area function at the design hold-up, `share` of the mixer being organic. */
function designArea(mixer: Mixer, share: number): number {
  const dispersed = mixer.continuity === 'aqueous' ? share : 1 - share;
  const fixed = mixer.transfer.given === 'ka' && mixer.transfer.fixed;
  const g = area(constant(dispersed), constant(1 - dispersed), fixed);
  return g.kind === 'constant' ? g.value : Number.NaN;
}

/** Numbers of the agitator, and what people look for in it: drop size, area, power, how well it disperses. */
function agitator(book: Book, path: string, mixer: Mixer, base: readonly Ref[]): Ref[] {
  if (mixer.transfer.given !== 'impeller') return [];
  const { impeller: i } = mixer.transfer;
  const { density, viscosity, tension } = book.s.properties;
  const speed = book.input({ path: `${path}.mixer.speed`, unit: '1/s', scale: i.speed }, i.speed);
  const own = [
    speed,
    book.ledger.parameter(`${path}.mixer.impeller.diameter`, 'm', i.diameter),
    book.number(i.vessel),
    book.number(i.powerNumber),
    ...[density.aqueous, density.organic, viscosity.aqueous, viscosity.organic, tension].map((v) =>
      book.number(v as number),
    ),
    book.number(i.speed),
  ];
  const figures = book.ledger.signal(agitatorFigures(i.drops), ...base, ...own);
  const shown = [
    ['drop diameter', 'm', 1e-3],
    ['area', '1/m', 1e3],
    ['power', 'W', 1e3],
    ['speed over least', '', 1],
  ] as const;
  shown.forEach(([name, unit, scale], k) => {
    book.showValue(`${path}.mixer.${name}`, unit, scale, figures[k]);
  });
  book.ledger.guard(
    {
      name: `${path}.mixer below least speed`,
      direction: -1,
      message: `the agitator of ${path} runs below the least speed that disperses all: less area than the correlation gives`,
      fromStart: true,
      action: 'report',
    },
    past,
    figures[shown.length - 1],
    book.number(1),
  );
  return own;
}
