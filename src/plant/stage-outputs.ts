import { add, div, select, sub } from '../math/expression.ts';
import { kernel } from '../math/kernel.ts';
import { usualInversion } from '../scenario/plain.ts';
import type { Book, Part } from './book.ts';
import { type Of, PHASES } from './flow.ts';
import { past } from './kernels.ts';
import type { Ref } from './ledger.ts';
import type { Vessel } from './vessel.ts';

interface Shown {
  readonly mixer: Of<Ref>;
  readonly layer: Of<Ref>;
  readonly last: Of<Part>;
  readonly carried: Of<Ref | null>;
}

const organicShare = kernel('organic share', ['aqueous', 'organic'], (a, o) => div(o, add(a, o)));
const beyond = kernel('beyond', ['aqueous', 'organic', 'share'], (a, o, share) =>
  sub(div(o, add(a, o)), share),
);
const thin = kernel('thin', ['aqueous', 'organic', 'continuity', 'low', 'high'], (a, o, mode, low, high) => {
  const share = div(o, add(a, o));
  return select(sub(mode, 0.5), sub(low, share), sub(share, high));
});
const ratio = kernel('ratio', ['volume', 'area'], (v, a) => div(v, a));

/** What a stage shows: concentrations of mixer and settler outlets, volumes that move, and the events that it may have. */
export function writeStageOutputs(book: Book, v: Vessel, r: Shown): void {
  const { path, stage, places, band } = v;
  for (const phase of PHASES) {
    const mixerPart = {
      places: places.mixer[phase],
      perVolume: book.signal(book.perVolumeKernel, r.mixer[phase], v.least),
    };
    for (let k = 0; k < book.components(phase); k++)
      book.show(`${path}.mixer.${phase}`, k, book.contentOf(mixerPart, k));
    for (let k = 0; k < book.components(phase); k++)
      book.show(`${path}.settler.${phase}`, k, book.contentOf(r.last[phase], k));
  }
  if (places.volumes.mixer.organic)
    book.ledger.output(
      { path: `${path}.mixer.organic_share`, unit: '', scale: 1 },
      organicShare,
      r.mixer.aqueous,
      r.mixer.organic,
    );
  if (places.volumes.mixer.aqueous)
    book.showValue(`${path}.mixer.aqueous_volume`, 'm^3', stage.mixer.volume, r.mixer.aqueous);
  for (const phase of PHASES) {
    const carried = r.carried[phase];
    if (carried)
      book.showValue(`${path}.settler.${phase}_carried`, 'm^3/s', v.design.entering[phase] * 1e-4, carried);
  }
  if (band && v.area) {
    book.showValue(`${path}.settler.band`, 'm', 0.1, band.thickness);
    for (const phase of PHASES) {
      // Only the continuous phase's layer can be outgrown; the other guard is watched but not armed by its mode.
      const name = `${path}.settler floods with ${phase === 'aqueous' ? 'organic' : 'aqueous'}`;
      const flood = phase === 'aqueous' ? band.floodOrganic : band.floodAqueous;
      book.ledger.guard(
        {
          name,
          direction: 1,
          message: `the band of ${path} has grown into the outlet: it floods, and ${phase === 'aqueous' ? 'organic' : 'aqueous'} leaves with the ${phase}`,
          action: 'report',
          fromStart: true,
        },
        past,
        flood,
        book.number(1e-9),
      );
    }
  }
  if (v.outlets === null && (band !== null || places.volumes.mixer.organic !== null)) {
    for (const phase of PHASES)
      book.ledger.guard(
        {
          name: `${path}.settler ${phase} layer used up`,
          direction: -1,
          message: `mixer and band of ${path} have taken up all ${phase} of its settler: full vessels have no answer to that, and what follows in this stage is not to be trusted; state hydraulics: weirs`,
          fromStart: true,
          action: 'report',
        },
        past,
        r.layer[phase],
        book.number(0),
      );
  }
  if (stage.mixer.inversion) {
    const { low, high } = stage.mixer.inversion;
    const mode = v.continuity.index;
    const flip = (name: string, direction: 1 | -1, bound: number, to: number, words: string): void => {
      book.ledger.guard(
        {
          name: `${path} ${name}`,
          direction,
          message: `${path} inverts: it becomes ${words} continuous`,
          fromStart: true,
          action: { set: [[mode, to]] },
        },
        beyond,
        r.mixer.aqueous,
        r.mixer.organic,
        book.number(bound),
      );
    };
    flip('becomes organic continuous', 1, high, 1, 'organic');
    flip('becomes aqueous continuous', -1, low, 0, 'aqueous');
  }
  if (stage.mixer.inversion === null && places.volumes.mixer.organic)
    book.ledger.guard(
      {
        name: `${path} near inversion`,
        direction: 1,
        message: `the continuous phase of ${path} is less than ${100 * usualInversion.low} % of its mixer: beyond the usual limits it may invert`,
        fromStart: true,
        action: 'report',
      },
      thin,
      ...[r.mixer.aqueous, r.mixer.organic, v.continuity],
      ...[book.number(usualInversion.low), book.number(usualInversion.high)],
    );
  if (v.outlets && v.area && stage.settler.weirs) {
    const lost = (name: string, message: string, flow: Ref): void => {
      book.ledger.guard(
        {
          name: `${path} ${name}`,
          direction: 1,
          message: `${path}: ${message}`,
          action: 'report',
          fromStart: true,
        },
        past,
        flow,
        book.number(1e-9),
      );
    };
    lost(
      'interface low',
      'the interface is lost through the underflow; organic leaves with the aqueous',
      v.outlets.underflowOrganic,
    );
    lost(
      'interface high',
      'the interface is up at the organic weir; aqueous leaves with the organic',
      v.outlets.overflowAqueous,
    );
    for (const phase of PHASES)
      book.ledger.output(
        { path: `${path}.settler.${phase}_depth`, unit: 'm', scale: 0.3 },
        ratio,
        r.layer[phase],
        v.area,
      );
  }
}
