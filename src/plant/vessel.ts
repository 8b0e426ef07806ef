import type { Stage, Train } from '../scenario/scenario.ts';
import { type BandFlows, writeBand } from './band.ts';
import { type Book, NEARLY_EMPTY } from './book.ts';
import type { StageDesign } from './design.ts';
import { forBoth, type Of } from './flow.ts';
import {
  available,
  chosen,
  clearLayer,
  difference,
  entrainedFrom,
  entrainedOf,
  product,
  rest,
  sum,
} from './kernels.ts';
import type { Ref } from './ledger.ts';
import type { StagePlaces } from './stage-places.ts';
import { VANISHING } from './transfer.ts';
import { headFor } from './weir-law.ts';
import { mixerOverflow, settlerOutlets } from './weirs.ts';

/** The volumes of a stage and what follows from them alone, before any flow between stages is known. */
export interface Vessel {
  readonly path: string;
  readonly stage: Stage;
  readonly design: StageDesign;
  readonly places: StagePlaces;
  /** 1: organic continuous, 0: aqueous continuous. */
  readonly continuity: Ref;
  readonly area: Ref | null;
  /** Volume below which a mixer phase counts as vanishing. */
  readonly least: Ref;
  /** Null in full vessels at rest until the flows are known. */
  readonly mixer: Of<Ref> | null;
  readonly layer: Of<Ref> | null;
  readonly band: BandFlows | null;
  /** With weirs: what the outlets do, and the share of the mixer that overflows a second. */
  readonly outlets: (Of<Ref> & { readonly underflowOrganic: Ref; readonly overflowAqueous: Ref }) | null;
  readonly rate: Ref | null;
}

/** Flows into a stage as pumps and feeds set them, and their sum at design. */
export interface Nominal extends Of<Ref> {
  readonly total: Ref;
  /** One over the number of trains that share a flow: each may lose its part of it, and none runs back. */
  readonly part: Of<number>;
}

/** Share of a phase that full vessels can lose to the other one by entrainment, and by flooding. */
const MOST_ENTRAINED = 0.04;
const MOST_FLOODED = 0.95;

export function openVessel(
  book: Book,
  train: Train,
  j: number,
  design: StageDesign,
  places: StagePlaces,
  nominal: Nominal,
  continuityMoves: boolean,
): Vessel {
  const { ledger } = book;
  const stage = train.stages[j];
  const { path, volumes } = places;
  const { settler } = stage;
  const value = stage.mixer.continuity === 'organic' ? 1 : 0;
  const continuity = continuityMoves
    ? book.input({ path: `${path}.continuity`, unit: '', scale: 1 }, value)
    : book.number(value);
  const area = settler.area === null ? null : ledger.parameter(`${path}.settler.area`, 'm^2', settler.area);
  const least = book.number(stage.mixer.volume * VANISHING);

  let mixer: Of<Ref> | null = null;
  if (volumes.mixer.organic !== null) {
    const organic = volumes.mixer.organic;
    const V = (): Ref => ledger.parameter(`${path}.mixer.volume`, 'm^3', stage.mixer.volume);
    mixer = { organic, aqueous: volumes.mixer.aqueous ?? book.signal(difference, V(), organic) };
  }
  const inMixer = mixer;
  const layer =
    volumes.layer ??
    (inMixer === null
      ? null
      : forBoth((phase) => clear(book, path, design, phase, inMixer[phase], volumes.band?.[phase])));

  let band: BandFlows | null = null;
  const rate =
    train.hydraulics === 'weirs' && inMixer ? overflowRate(book, path, stage, inMixer, least, design) : null;
  if (volumes.band && inMixer && layer && area) {
    const load =
      rate === null
        ? forBoth((phase) =>
            book.signal(product, nominal[phase], book.number(MOST_FLOODED * nominal.part[phase])),
          )
        : forBoth((phase) => book.signal(product, inMixer[phase], rate));
    band = writeBand(book, path, stage, area, {
      band: volumes.band,
      layer,
      mixer: inMixer,
      load,
      continuity,
    });
  }
  let outlets: Vessel['outlets'] = null;
  if (train.hydraulics === 'weirs' && layer && area)
    outlets = weirs(book, path, stage, design, area, layer, volumes.band);
  return { path, stage, design, places, continuity, area, least, mixer, layer, band, outlets, rate };
}

/** A phase led past a stage with weirs shuts the outlet of that phase, and with it what it would carry. */
export function shutByBypass(book: Book, v: Vessel, bypass: Of<Ref | null>): Vessel {
  if (v.outlets === null || (bypass.aqueous === null && bypass.organic === null)) return v;
  const open = forBoth((phase) => {
    const by = bypass[phase];
    return by === null ? null : book.signal(rest, by);
  });
  const shut = (flow: Ref, share: Ref | null): Ref => (share ? book.signal(product, flow, share) : flow);
  const { aqueous, organic, underflowOrganic, overflowAqueous } = v.outlets;
  return {
    ...v,
    outlets: {
      aqueous: shut(aqueous, open.aqueous),
      underflowOrganic: shut(underflowOrganic, open.aqueous),
      organic: shut(organic, open.organic),
      overflowAqueous: shut(overflowAqueous, open.organic),
    },
    band: v.band && {
      ...v.band,
      floodOrganic: shut(v.band.floodOrganic, open.aqueous),
      floodAqueous: shut(v.band.floodAqueous, open.organic),
    },
  };
}

/** Clear layer of a full stage: its constant volume of the phase, less mixer and band. */
export function clear(
  book: Book,
  path: string,
  d: StageDesign,
  phase: 'aqueous' | 'organic',
  inMixer: Ref,
  inBand?: Ref,
): Ref {
  const all = d.mixer[phase] + d.band[phase] + d.layer[phase];
  const held = book.ledger.parameter(`${path}.${phase}.volume`, 'm^3', all);
  return inBand ? book.signal(clearLayer, held, inMixer, inBand) : book.signal(difference, held, inMixer);
}

function overflowRate(
  book: Book,
  path: string,
  stage: Stage,
  mixer: Of<Ref>,
  least: Ref,
  d: StageDesign,
): Ref {
  const { length, area } = stage.mixer.overflow;
  const crest = stage.mixer.volume / area - headFor(d.entering.aqueous + d.entering.organic, length);
  return book.signal(
    mixerOverflow,
    mixer.aqueous,
    mixer.organic,
    book.ledger.parameter(`${path}.mixer.area`, 'm^2', area),
    book.ledger.parameter(`${path}.mixer.crest`, 'm', crest),
    book.number(length),
    least,
  );
}

function weirs(
  book: Book,
  path: string,
  stage: Stage,
  d: StageDesign,
  area: Ref,
  layer: Of<Ref>,
  band: Of<Ref> | null,
): Vessel['outlets'] {
  const w = stage.settler.weirs as NonNullable<Stage['settler']['weirs']>;
  const crest = d.crest as Of<number>;
  const { density } = book.s.properties;
  const held = forBoth((phase) => (band ? book.signal(sum(2), layer[phase], band[phase]) : layer[phase]));
  const clearShare = (phase: 'aqueous' | 'organic'): Ref =>
    book.signal(available, layer[phase], book.number(d.layer[phase] * NEARLY_EMPTY));
  const [aqueous, underflowOrganic, organic, overflowAqueous, top, interfaceLevel] = book.ledger.signal(
    settlerOutlets,
    ...[
      held.aqueous,
      held.organic,
      area,
      book.number((density.organic as number) / (density.aqueous as number)),
    ],
    ...[book.number(w.loss), book.number(w.port)],
    book.input({ path: `${path}.settler.aqueous_weir`, unit: 'm', scale: crest.aqueous }, crest.aqueous),
    book.number(crest.organic),
    ...[book.number(w.aqueousLength), book.number(w.organicLength)],
    ...[clearShare('aqueous'), clearShare('organic')],
  );
  const shown = [
    ['level', top],
    ['interface', interfaceLevel],
  ] as const;
  for (const [name, ref] of shown) book.showValue(`${path}.settler.${name}`, 'm', crest.organic, ref);
  return { aqueous, organic, underflowOrganic, overflowAqueous };
}

/**
 * What leaves a stage with the stream of the other phase: entrainment by the carrier's flow and the throughput, flooding,
 * and with weirs what a lost interface lets through. Null where nothing can.
 */
export function carriedOut(book: Book, v: Vessel, nominal: Nominal): Of<Ref | null> {
  const c = v.stage.settler.carry;
  const carrier = v.outlets ?? nominal;
  const flow = (phase: 'aqueous' | 'organic'): Ref | null => {
    const with_ = phase === 'organic' ? 'aqueous' : 'organic';
    const terms: Ref[] = [];
    if (c) {
      const key = phase === 'organic' ? 'organicInAqueous' : 'aqueousInOrganic';
      const own = book.ledger.parameter(`${v.path}.settler.${phase}_carried`, '', c[key]);
      const share = c.other ? byContinuity(book, v, own, book.number(c.other[key])) : own;
      const how = [
        share,
        carrier[with_],
        nominal.aqueous,
        nominal.organic,
        nominal.total,
        book.number(c.exponent),
      ];
      const least = book.number(v.design.layer[phase] * NEARLY_EMPTY);
      terms.push(
        v.outlets && v.layer
          ? book.signal(entrainedFrom, ...how, v.layer[phase], least)
          : book.signal(
              entrainedOf,
              ...how,
              nominal[phase],
              book.number(MOST_ENTRAINED * nominal.part[phase]),
            ),
      );
    }
    if (v.band) terms.push(phase === 'organic' ? v.band.floodOrganic : v.band.floodAqueous);
    if (v.outlets) terms.push(phase === 'organic' ? v.outlets.underflowOrganic : v.outlets.overflowAqueous);
    return terms.length === 0
      ? null
      : terms.length === 1
        ? terms[0]
        : book.signal(sum(terms.length), ...terms);
  };
  return { organic: flow('organic'), aqueous: flow('aqueous') };
}

/** A figure for the continuity at design, another for the other one. */
function byContinuity(book: Book, v: Vessel, own: Ref, other: Ref): Ref {
  return v.stage.mixer.continuity === 'organic'
    ? book.signal(chosen, v.continuity, own, other)
    : book.signal(chosen, v.continuity, other, own);
}
