import { formulaName } from '../scenario/names.ts';
import type { Maker, Network } from '../scenario/network.ts';
import { type Problem, Refusal } from '../scenario/refusal.ts';
import type { Law, Phase, Scenario, Train } from '../scenario/scenario.ts';
import { NEARLY_EMPTY } from './book.ts';
import { track } from './course.ts';
import { recycled, type TrainDesign } from './design.ts';
import { upstream } from './entering.ts';
import { forBoth, type Of, otherPhase, PHASES } from './flow.ts';
import { asWritten } from './laws/formula.ts';
import { headFor, NEAR_CREST } from './weir-law.ts';

type Exchange = Extract<Law, { law: 'exchange' }>;

/** Share of a layer that a band at rest must leave clear. */
const LEAST_CLEAR = 0.1;
/** Points at which a formula is looked at, closer together near zero, where isotherms bend. */
const POINTS = 400;
/** A formula counts as zero at zero below this share of its value at the largest feed: rounding, not an offset. */
const AT_ZERO = 1e-9;

/**
 * Refuses what the equations are not made for: a formula that does not rise from zero, solutes of one train on
 * different extractants, and settlers that a moving flow would empty into their mixers.
 *
 * @throws Refusal naming all of it.
 */
export function suitable(s: Scenario, net: Network, plans: readonly TrainDesign[]): void {
  const problems = s.trains.flatMap((t, i) => [
    ...fittingBands(t, plans[i]),
    ...risingFormulas(s, net, t),
    ...sameExtractant(s, t),
    ...roomForWeirs(t, plans[i]),
    ...roomySettlers(s, net, t),
  ]);
  if (problems.length > 0) throw new Refusal(problems);
}

/** Least and most of an input, its design value and the schedule taken together. */
function extremes(s: Scenario, quantity: string, design: number): { least: number; most: number } {
  const own = s.upsets.filter((u) => u.quantity === quantity);
  const values = [design, ...track(design, own, s.horizon).values];
  return { least: Math.min(...values), most: Math.max(...values) };
}

/** The largest concentration of a solute that any aqueous feed brings; of any other source where none has it. */
function largestFeed(s: Scenario, solute: number): number {
  const most = s.feeds.map((f) => ({
    phase: f.phase,
    value: extremes(s, `${f.name}.${s.solutes[solute]}`, f.content[solute]).most,
  }));
  const aqueous = Math.max(0, ...most.flatMap((q) => (q.phase === 'aqueous' ? [q.value] : [])));
  if (aqueous > 0) return aqueous;
  return Math.max(0, ...most.map((q) => q.value), ...s.tanks.map((t) => t.content[solute])) || 1;
}

/** f(0) = 0 and f′ > 0 on 0 … 2 × the largest feed, other components as they enter the train. */
function risingFormulas(s: Scenario, net: Network, t: Train): Problem[] {
  const names = [...s.solutes, ...s.species].map(formulaName);
  const entering = upstream(s, net, t.aqueous.from, 'aqueous');
  return t.equilibrium.flatMap((law, i): Problem[] => {
    if (law?.law !== 'formula') return [];
    const f = asWritten(law);
    const at = f.others.map((name) => entering[names.indexOf(name)]);
    const reach = 2 * largestFeed(s, i);
    const complain = (message: string): Problem[] => [
      { path: ['trains', t.name, 'equilibrium', s.solutes[i], 'organic'], message },
    ];
    const zero = f.value(0, at);
    if (!(Math.abs(zero) <= AT_ZERO * Math.abs(f.value(reach / 2, at))))
      return complain(`an isotherm passes through 0, 0, but the formula gives ${show(zero)} g/L at c_a = 0`);
    for (let k = 0; k <= POINTS; k++) {
      const ca = reach * (k / POINTS) ** 2;
      const slope = f.slope(ca, at);
      if (!(slope > 0 && slope < Infinity))
        return complain(
          `an isotherm rises from 0 to ${show(reach)} g/L (twice the largest feed), but the slope of the formula is ${show(slope)} at c_a = ${show(ca)} g/L`,
        );
    }
    return [];
  });
}

/** The free extractant is what all solutes together leave of it, so there is one total. */
function sameExtractant(s: Scenario, t: Train): Problem[] {
  const first = t.equilibrium.findIndex((law) => law?.law === 'exchange');
  return t.equilibrium.flatMap((law, i): Problem[] => {
    if (law?.law !== 'exchange') return [];
    const { extractant } = t.equilibrium[first] as Exchange;
    if (law.extractant === extractant) return [];
    const message = `'${s.solutes[first]}' and '${s.solutes[i]}' share one extractant, but ${show(extractant)} and ${show(law.extractant)} g/L are stated`;
    return [{ path: ['trains', t.name, 'equilibrium', s.solutes[i], 'extractant'], message }];
  });
}

/** A band at rest that fills its settler leaves no clear layer to start from: such a settler floods by design. */
function fittingBands(t: Train, plan: TrainDesign): Problem[] {
  for (const [j, { layer, band }] of plan.stages.entries()) {
    const { settler, mixer } = t.stages[j];
    if (settler.band === null || settler.area === null) continue;
    const fits = (['aqueous', 'organic'] as const).every(
      (phase) => layer[phase] >= LEAST_CLEAR * settler[phase],
    );
    if (fits) continue;
    const dispersed: Phase = mixer.continuity === 'organic' ? 'aqueous' : 'organic';
    const thick = band[dispersed] / (settler.area * settler.band.holdUp);
    const how = Number.isFinite(thick) ? `would be ${show(thick)} m thick` : 'would grow without end';
    const message = `at the flows of time zero the band of stage ${j + 1} ${how}, over layers of ${show(settler.aqueous / settler.area)} m aqueous and ${show(settler.organic / settler.area)} m organic`;
    return [{ path: ['trains', t.name, 'settler', 'band'], message }];
  }
  return [];
}

/**
 * A mixer follows its flows, recycle included, between the shares Q_o/(Q_a + Q_o) at their extremes, and never leaves
 * that range. What it takes up of a phase beyond its design hold-up comes out of the settler's layer, which must hold
 * that much.
 */
function roomySettlers(s: Scenario, net: Network, t: Train): Problem[] {
  // With weirs the levels give way, and a lost interface is an event.
  if (t.hydraulics === 'weirs') return [];
  const range = forBoth((phase) => flowRange(s, net, net.flowSource(t[phase].from)));
  return PHASES.flatMap((phase): Problem[] => {
    const other = otherPhase(phase);
    const ledPast = (which: Phase, j: number): boolean =>
      s.upsets.some((u) => u.quantity === `${t.name}.${j + 1}.${which} bypass`);
    for (const [j, { mixer, settler }] of t.stages.entries()) {
      const share = (own: number, against: number): number => {
        const back = recycled(t, { aqueous: 0, organic: 0, [phase]: own, [other]: against } as Of<number>);
        return (own + back[phase]) / (own + back[phase] + against + back[other]);
      };
      const least = ledPast(other, j) ? 0 : range[other].least;
      const most = Math.max(share(range[phase].most, least), share(range[phase].design, least));
      const more = mixer.volume * (most - share(range[phase].design, range[other].design));
      if (more <= settler[phase] * (1 - NEARLY_EMPTY)) continue;
      const message = `the settler of stage ${j + 1} is too small: at ${show(3600 * least)} m^3/h of ${other} its mixer takes up ${show(more)} m^3 of ${phase} more, but the ${phase} layer holds only ${show(settler[phase])} m^3`;
      return [{ path: ['trains', t.name, 'settler'], message }];
    }
    return [];
  });
}

/** Depths that leave the interface clear of port and crest, and crests that stand above the floor. */
function roomForWeirs(t: Train, plan: TrainDesign): Problem[] {
  if (t.hydraulics !== 'weirs') return [];
  for (const [j, { settler, mixer }] of t.stages.entries()) {
    const { weirs, area } = settler;
    const { crest, leaving, entering } = plan.stages[j];
    if (weirs === null || area === null || crest === null) continue;
    const head = headFor(leaving.organic, weirs.organicLength);
    const complain = (field: string, message: string): Problem[] => [
      { path: ['trains', t.name, field], message: `stage ${j + 1}: ${message}` },
    ];
    if (settler.organic / area < head + NEAR_CREST)
      return complain(
        'settler',
        `the organic layer must be deeper than the head over its weir and the ${NEAR_CREST} m above the interface that keep aqueous back: ${show(head + NEAR_CREST)} m, got ${show(settler.organic / area)} m`,
      );
    if (settler.aqueous / area < weirs.port)
      return complain(
        'settler',
        `the aqueous layer must be deeper than the port of its outlet, ${show(weirs.port)} m, got ${show(settler.aqueous / area)} m`,
      );
    if (crest.aqueous <= 0)
      return complain(
        'settler',
        `the crest of the aqueous weir would be at ${show(crest.aqueous)} m; it must be above the floor`,
      );
    const { length, area: plan_ } = mixer.overflow;
    const deep = mixer.volume / plan_;
    const over = headFor(entering.aqueous + entering.organic, length);
    if (over >= deep)
      return complain(
        'mixer',
        `the head over its weir, ${show(over)} m, must be less than its depth, ${show(deep)} m`,
      );
  }
  return [];
}

function flowRange(s: Scenario, net: Network, m: Maker): { design: number; least: number; most: number } {
  const { name, flow } = m.kind === 'feed' ? s.feeds[m.index] : s.tanks[m.index];
  const design = flow as number;
  const { least, most } = extremes(s, `${name}.flow`, design);
  const stops = runsDry(s, net, m) || s.upsets.some((u) => u.quantity === `${name}.pump`);
  return { design, least: stops ? 0 : least, most };
}

/** A tank that is filled by one flow and emptied by another can run dry, and then its pump stops. */
function runsDry(s: Scenario, net: Network, m: Maker): boolean {
  if (m.kind !== 'tank') return false;
  const filledBy = net.flowSource(s.tanks[m.index].from);
  return filledBy.kind !== m.kind || filledBy.index !== m.index;
}

const show = (v: number): string => String(Number(v.toPrecision(4)));
