import type { Network } from '../scenario/network.ts';
import type { Band, BandPoint, Branch, Phase, Scenario, Stage, Train } from '../scenario/scenario.ts';
import { numbers } from './algebra.ts';
import { type FlowAlgebra, Flows } from './flows.ts';
import { route } from './route.ts';
import { headFor } from './weir-law.ts';

/** s that the continuous phase of a band stays above what the drops need: short against everything else. */
export const BAND_DRAINS = 5;

/** One number for each phase. */
export type Both = Readonly<Record<Phase, number>>;

/** A stage at the flows of time zero, m³ and m³/s: hold-ups, k·a, crests and bands are stated for these. */
export interface StageDesign {
  /** What feeds and pumps set as entering flow. */
  readonly set: Both;
  /** Everything that enters the mixer, by phase: neighbours, what they carry over, recycle, flow back. */
  readonly entering: Both;
  readonly recycled: Both;
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
  readonly stages: readonly StageDesign[];
}

/** Flows as feeds and pumps set them, m³/s; by default at time zero. */
export function setFlows(
  s: Scenario,
  net: Network,
  origin: FlowAlgebra<number>['origin'] = (m) =>
    m.kind === 'feed' ? s.feeds[m.index].flow : (s.tanks[m.index].flow as number),
): Flows<number> {
  return new Flows(s, net, {
    ...numbers,
    origin,
    take: ({ take }, whole) => ('share' in take ? whole * take.share : Math.min(take.flow, whole)),
    rest: (whole, takes) => whole - numbers.add(...takes),
  });
}

/** Design of every train; streams between trains bring on what they carry. */
export function designs(s: Scenario, net: Network): TrainDesign[] {
  const set = setFlows(s, net);
  const setAt = (i: number, j: number): Both => ({
    aqueous: set.stage(i, 'aqueous', j).enters,
    organic: set.stage(i, 'organic', j).enters,
  });
  // A branch takes its share of what is carried as well, and of what carry-over adds to its stream.
  const share = (b: Branch): number => {
    const whole = set.whole(b.name);
    return whole > 0 ? set.stream(b.name).flow / whole : 0;
  };
  const flows = new Flows(
    s,
    net,
    {
      ...numbers,
      origin: (m) => (m.kind === 'feed' ? s.feeds[m.index].flow : (s.tanks[m.index].flow as number)),
      take: (b, whole) => whole * share(b),
      rest: (whole, takes) => whole - numbers.add(...takes),
    },
    { carried: (i, j) => carriedBy(s.trains[i].stages[j], setAt(i, j)) },
  );
  const { density } = s.properties;
  const ratio =
    density.aqueous !== null && density.organic !== null ? density.organic / density.aqueous : Number.NaN;
  return s.trains.map((t, i) => ({
    stages: t.stages.map((q, j) => stageDesign(t, q, setAt(i, j), ratio, flowsInto(t, i, j, flows))),
  }));
}

interface StageFlows {
  readonly enters: Both;
  readonly leaves: Both;
}

/** What enters a mixer, and what leaves the stage as main flow. */
function flowsInto(t: Train, i: number, j: number, flows: Flows<number>): StageFlows {
  const enters = (phase: Phase): number => {
    const at = flows.stage(i, phase, j);
    return at.enters + at.carriedIn + flowBack(t, phase, j, (k) => flows.stage(i, phase, k).onward.flow);
  };
  const leaves = (phase: Phase): number => flows.stage(i, phase, j).leaves.flow;
  return {
    enters: { aqueous: enters('aqueous'), organic: enters('organic') },
    leaves: { aqueous: leaves('aqueous'), organic: leaves('organic') },
  };
}

/**
 * Back-flow model (Sleicher, AIChE J. 5, 145 (1959); Miyauchi and Vermeulen, Ind. Eng. Chem. Fundam. 2, 304 (1963);
 * from memory): between neighbours that exchange a net flow q, β·q goes back and (1 + β)·q onward. Into stage j come β
 * times the net flows that pass on its two sides.
 */
export function flowBack(t: Train, phase: Phase, j: number, onward: (stage: number) => number): number {
  const beta = t.backFlow[phase];
  if (beta === 0) return 0;
  const r = route(t, phase);
  const before = r.before(j);
  return beta * ((before === null ? 0 : onward(before)) + (r.after(j) === null ? 0 : onward(j)));
}

/** Entrained flows of a stage at design throughput. */
function carriedBy(q: Stage, set: Both): Both {
  const c = q.settler.carry;
  return {
    organic: (c?.organicInAqueous ?? 0) * set.aqueous,
    aqueous: (c?.aqueousInOrganic ?? 0) * set.organic,
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

function stageDesign(t: Train, q: Stage, set: Both, ratio: number, flows: StageFlows): StageDesign {
  const back = recycled(t, set);
  const entering = {
    aqueous: flows.enters.aqueous + back.aqueous,
    organic: flows.enters.organic + back.organic,
  };
  const share = q.mixer.organicShare ?? entering.organic / (entering.aqueous + entering.organic);
  const mixer = { organic: q.mixer.volume * share, aqueous: q.mixer.volume * (1 - share) };
  const band = bandVolumes(q, entering);
  const layer = { aqueous: q.settler.aqueous - band.aqueous, organic: q.settler.organic - band.organic };
  return {
    set,
    entering,
    recycled: back,
    leaving: flows.leaves,
    mixer,
    band,
    layer,
    crest: crests(t, q, flows.leaves, ratio),
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
