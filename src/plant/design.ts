import type { Network } from '../scenario/network.ts';
import type { Band, BandPoint, Phase, Scenario, Stage, Train } from '../scenario/scenario.ts';
import { headFor } from './weir-law.ts';

/** s that the continuous phase of a band stays above what the drops need: short against everything else. */
export const BAND_DRAINS = 5;

/** One number for each phase. */
export type Both = Readonly<Record<Phase, number>>;

/** A stage at the flows of time zero, m³ and m³/s: hold-ups, k·a, crests and bands are stated for these. */
export interface StageDesign {
  /** Everything that enters the mixer, by phase: neighbours, what they carry over, recycle. */
  readonly entering: Both;
  readonly recycled: Both;
  /** Carried out with the stream of the other phase: `carried.organic` leaves with the aqueous. */
  readonly carried: Both;
  /** Main flow out of the settler. */
  readonly leaving: Both;
  readonly mixer: Both;
  readonly band: Both;
  /** Clear layers, band taken off. */
  readonly layer: Both;
  /** m above the floor: crest of the organic weir, and of the aqueous weir in its leg. */
  readonly crest: Both | null;
}

export interface TrainDesign {
  /** Flow that the pumps and feeds behind each inlet set. */
  readonly nominal: Both;
  /** Main inlet flow, and what the other stream carries in of this phase. */
  readonly inlet: Both;
  readonly carriedIn: Both;
  readonly stages: readonly StageDesign[];
}

/** Design of every train; streams between trains bring on what they carry. */
export function designs(s: Scenario, net: Network): TrainDesign[] {
  const nominal = (stream: string): number => {
    const m = net.flowSource(stream);
    return m.kind === 'feed' ? s.feeds[m.index].flow : (s.tanks[m.index].flow as number);
  };
  const nominals = s.trains.map(
    (t): Both => ({ aqueous: nominal(t.aqueous.from), organic: nominal(t.organic.from) }),
  );
  const carry = s.trains.map((t, i) => t.stages.map((q) => carriedBy(q, nominals[i])));
  /** What a stream carries of the other phase. */
  const carriedWith = (stream: string): number => {
    const { maker, phase } = net.streams.get(stream) as {
      maker: { kind: string; index: number };
      phase: Phase;
    };
    if (maker.kind === 'train') {
      const last = carry[maker.index][phase === 'aqueous' ? carry[maker.index].length - 1 : 0];
      return phase === 'aqueous' ? last.organic : last.aqueous;
    }
    if (maker.kind === 'tank') {
      const tank = s.tanks[maker.index];
      return tank.passes * carriedWith(tank.from);
    }
    return 0;
  };
  const main = (stream: string): number => {
    const { maker, phase } = net.streams.get(stream) as {
      maker: { kind: string; index: number };
      phase: Phase;
    };
    if (maker.kind !== 'train') return nominal(stream);
    const t = s.trains[maker.index];
    const other: Phase = phase === 'aqueous' ? 'organic' : 'aqueous';
    const out = carry[maker.index][phase === 'aqueous' ? 0 : t.stages.length - 1][phase];
    return main(t[phase].from) + carriedWith(t[other].from) - out;
  };
  const { density } = s.properties;
  const ratio =
    density.aqueous !== null && density.organic !== null ? density.organic / density.aqueous : Number.NaN;
  return s.trains.map((t, i) => {
    const inlet = { aqueous: main(t.aqueous.from), organic: main(t.organic.from) };
    const carriedIn = { aqueous: carriedWith(t.organic.from), organic: carriedWith(t.aqueous.from) };
    return {
      nominal: nominals[i],
      inlet,
      carriedIn,
      stages: t.stages.map((q, j) => stageDesign(t, q, j, carry[i], inlet, carriedIn, nominals[i], ratio)),
    };
  });
}

/** Entrained flows of a stage at design throughput. */
function carriedBy(q: Stage, nominal: Both): Both {
  const c = q.settler.carry;
  return {
    organic: (c?.organicInAqueous ?? 0) * nominal.aqueous,
    aqueous: (c?.aqueousInOrganic ?? 0) * nominal.organic,
  };
}

/** Recycle that is asked for at given flows. */
export function recycled(t: Train, nominal: Both): Both {
  const r = t.recycle;
  if (r === null) return { aqueous: 0, organic: 0 };
  if ('phase' in r) return { aqueous: 0, organic: 0, [r.phase]: r.flow };
  return {
    aqueous: Math.max(0, nominal.organic / r.hold - nominal.aqueous),
    organic: Math.max(0, nominal.aqueous * r.hold - nominal.organic),
  };
}

function stageDesign(
  t: Train,
  q: Stage,
  j: number,
  carry: readonly Both[],
  inlet: Both,
  carriedIn: Both,
  nominal: Both,
  ratio: number,
): StageDesign {
  const n = t.stages.length;
  const b = (i: number, phase: Phase): number =>
    i < 0
      ? carriedIn.organic * (phase === 'organic' ? 1 : 0)
      : i >= n
        ? carriedIn.aqueous * (phase === 'aqueous' ? 1 : 0)
        : carry[i][phase];
  const forward = (i: number): number => inlet.aqueous + b(i + 1, 'aqueous') - b(0, 'aqueous');
  const backward = (i: number): number => inlet.organic + b(i - 1, 'organic') - b(n - 1, 'organic');
  const back = recycled(t, nominal);
  const entering = {
    aqueous: forward(j - 1) + b(j + 1, 'aqueous') + back.aqueous,
    organic: backward(j + 1) + b(j - 1, 'organic') + back.organic,
  };
  const leaving = { aqueous: forward(j), organic: backward(j) };
  const share = entering.organic / (entering.aqueous + entering.organic);
  const mixer = { organic: q.mixer.volume * share, aqueous: q.mixer.volume * (1 - share) };
  const band = bandVolumes(q, entering);
  const layer = { aqueous: q.settler.aqueous - band.aqueous, organic: q.settler.organic - band.organic };
  return {
    entering,
    recycled: back,
    carried: carry[j],
    leaving,
    mixer,
    band,
    layer,
    crest: crests(t, q, leaving, ratio),
  };
}

/** Band at rest under the dispersed flow of the design. */
function bandVolumes(q: Stage, entering: Both): Both {
  const { band, area } = q.settler;
  if (band === null || area === null) return { aqueous: 0, organic: 0 };
  const dispersed: Phase = q.mixer.continuity === 'organic' ? 'aqueous' : 'organic';
  const thickness = bandThickness(band, entering[dispersed] / area) * band.coalescer;
  const drops = thickness * area * band.holdUp;
  const between = (drops * (1 - band.holdUp)) / band.holdUp + BAND_DRAINS * entering[q.mixer.continuity];
  return dispersed === 'aqueous'
    ? { aqueous: drops, organic: between }
    : { aqueous: between, organic: drops };
}

/** Steady thickness of a band without coalescer at a specific dispersed flow, m. */
export function bandThickness(b: BandPoint | Band, specific: number): number {
  if ('exponent' in b.law) return b.thickness * (specific / b.at) ** b.law.exponent;
  const { k1, k2 } = hyperbola(b);
  return specific * k2 >= 1 ? Infinity : (k1 * specific) / (1 - k2 * specific);
}

/** k₁ [s] and k₂ [s/m] of Q/A = H/(k₁ + k₂·H) from one measured thickness and the flooding flux. */
export function hyperbola(b: BandPoint): { k1: number; k2: number } {
  const floods = 'floodsAt' in b.law ? b.law.floodsAt : Infinity;
  const k2 = 1 / floods;
  return { k1: (b.thickness * (1 - k2 * b.at)) / b.at, k2 };
}

/** Crests that give the stated depths at the design flows: z_ow = d_a + d_o − h_o, z_aw = d_a + (ρ_o/ρ_a)·d_o − loss − h_a. */
function crests(t: Train, q: Stage, leaving: Both, ratio: number): Both | null {
  const { weirs, area, aqueous, organic } = q.settler;
  if (t.hydraulics !== 'weirs' || weirs === null || area === null) return null;
  const depth = { aqueous: aqueous / area, organic: organic / area };
  return {
    organic: depth.aqueous + depth.organic - headFor(leaving.organic, weirs.organicLength),
    aqueous:
      depth.aqueous + ratio * depth.organic - weirs.loss - headFor(leaving.aqueous, weirs.aqueousLength),
  };
}
