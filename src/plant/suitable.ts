import { formulaName } from '../scenario/names.ts';
import type { Network } from '../scenario/network.ts';
import { type Problem, Refusal } from '../scenario/refusal.ts';
import type { Branch, Law, Path, Phase, Scenario, Train } from '../scenario/scenario.ts';
import { type Range, ranges } from './algebra.ts';
import { NEARLY_EMPTY } from './book.ts';
import { track } from './course.ts';
import { recycled, setFlows, type TrainDesign } from './design.ts';
import { Entering } from './entering.ts';
import { forBoth, type Of, otherPhase, PHASES } from './flow.ts';
import { Flows } from './flows.ts';
import { asWritten } from './laws/formula.ts';
import { setByPump } from './symbols.ts';
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
  const flows = flowRanges(s, net);
  const start = new Entering(s, net);
  const problems = [
    ...enoughToTake(s, net),
    ...s.trains.flatMap((t, i) => [
      ...fittingBands(t, plans[i]),
      ...risingFormulas(s, ['trains', t.name], t.equilibrium, start.stream(t.aqueous.from)),
      ...sameExtractant(s, ['trains', t.name], t.equilibrium),
      ...roomForWeirs(t, plans[i]),
      ...roomySettlers(s, t, plans[i], (phase, j) => flows.stage(i, phase, j).enters),
    ]),
    ...s.batches.flatMap((b) => [
      ...risingFormulas(s, ['batches', b.name], b.equilibrium, b.content.aqueous),
      ...sameExtractant(s, ['batches', b.name], b.equilibrium),
    ]),
  ];
  if (problems.length > 0) throw new Refusal(problems);
}

/** Least and most of an input, its design value and the schedule taken together. */
function extremes(s: Scenario, quantity: string, design: number): { least: number; most: number } {
  const own = s.upsets.filter((u) => u.quantity === quantity);
  let [least, most] = [design, design];
  for (const v of track(design, own, s.horizon).values) {
    if (v < least) least = v;
    if (v > most) most = v;
  }
  return { least, most };
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
function risingFormulas(
  s: Scenario,
  owner: Path,
  equilibrium: Train['equilibrium'],
  entering: readonly number[],
): Problem[] {
  const names = [...s.solutes, ...s.species].map(formulaName);
  return equilibrium.flatMap((law, i): Problem[] => {
    if (law?.law !== 'formula') return [];
    const f = asWritten(law);
    const at = f.others.map((name) => entering[names.indexOf(name)]);
    const reach = 2 * largestFeed(s, i);
    const complain = (message: string): Problem[] => [
      { path: [...owner, 'equilibrium', s.solutes[i], 'organic'], message },
    ];
    const zero = f.value(0, at);
    if (!(Math.abs(zero) <= AT_ZERO * Math.abs(f.value(reach / 2, at))))
      return complain(
        `an isotherm passes through 0, 0, but the formula gives ${show(zero)} g/L at c_a = 0; take that off`,
      );
    for (let k = 0; k <= POINTS; k++) {
      const ca = reach * (k / POINTS) ** 2;
      const slope = f.slope(ca, at);
      if (!(slope > 0 && slope < Infinity))
        return complain(
          `an isotherm rises from 0 to ${show(reach)} g/L (twice the largest feed), but the slope of the formula is ${show(slope)} at c_a = ${show(ca)} g/L${ca === 0 && slope === Infinity ? '; a power below 1 is a Freundlich isotherm: use law: freundlich' : '; change the formula, or measure points and use law: table'}`,
        );
    }
    return [];
  });
}

/** The free extractant is what all solutes together leave of it, so there is one total. */
function sameExtractant(s: Scenario, owner: Path, equilibrium: Train['equilibrium']): Problem[] {
  const first = equilibrium.findIndex((law) => law?.law === 'exchange');
  return equilibrium.flatMap((law, i): Problem[] => {
    if (law?.law !== 'exchange') return [];
    const { extractant } = equilibrium[first] as Exchange;
    if (law.extractant === extractant) return [];
    const message = `'${s.solutes[first]}' and '${s.solutes[i]}' share one extractant, but ${show(extractant)} and ${show(law.extractant)} g/L are stated; state the same total`;
    return [{ path: [...owner, 'equilibrium', s.solutes[i], 'extractant'], message }];
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
    const message = `at the flows of time zero the band of stage ${j + 1} ${how}, over layers of ${show(settler.aqueous / settler.area)} m aqueous and ${show(settler.organic / settler.area)} m organic; enlarge area or depth, or look at thickness, at and exponent`;
    return [{ path: ['trains', t.name, 'settler', 'band'], message }];
  }
  return [];
}

/**
 * A mixer follows its flows, recycle included, between the shares Q_o/(Q_a + Q_o) at their extremes, and never leaves
 * that range. What it takes up of a phase beyond its design hold-up comes out of the settler's layer, which must hold
 * that much.
 */
function roomySettlers(
  s: Scenario,
  t: Train,
  plan: TrainDesign,
  enters: (phase: Phase, j: number) => Range,
): Problem[] {
  // With weirs the levels give way, and a lost interface is an event.
  if (t.hydraulics === 'weirs') return [];
  return PHASES.flatMap((phase): Problem[] => {
    const other = otherPhase(phase);
    const ledPast = (which: Phase, j: number): boolean =>
      s.upsets.some((u) => u.quantity === `${t.name}.${j + 1}.${which} bypass`);
    for (const [j, { mixer, settler }] of t.stages.entries()) {
      if (settler.parts === 0) continue;
      const range = forBoth((which) => ({ ...enters(which, j), design: plan.stages[j].set[which] }));
      const share = (own: number, against: number): number => {
        const back = recycled(t, { aqueous: 0, organic: 0, [phase]: own, [other]: against } as Of<number>);
        return (own + back[phase]) / (own + back[phase] + against + back[other]);
      };
      const least = ledPast(other, j) ? 0 : range[other].least;
      const most = Math.max(share(range[phase].most, least), share(range[phase].design, least));
      const more = mixer.volume * (most - share(range[phase].design, range[other].design));
      if (more <= settler[phase] * (1 - NEARLY_EMPTY)) continue;
      const message = `the settler of stage ${j + 1} is too small: at ${show(3600 * least)} m^3/h of ${other} its mixer takes up ${show(more)} m^3 of ${phase} more, but the ${phase} layer holds only ${show(settler[phase])} m^3; enlarge it, or state hydraulics: weirs`;
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
        `the crest of the aqueous weir would be at ${show(crest.aqueous)} m; it must be above the floor; deepen the layers`,
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

/** Between which bounds every flow stays, all changes taken together. */
function flowRanges(s: Scenario, net: Network): Flows<Range> {
  const isOwn = setByPump(s, net);
  const shareOf = (b: Branch): Range =>
    'share' in b.take ? extremes(s, `${b.name}.share`, b.take.share) : { least: 0, most: 1 };
  return new Flows<Range>(s, net, {
    ...ranges,
    origin: (m) => {
      const { name, flow } = m.kind === 'feed' ? s.feeds[m.index] : s.tanks[m.index];
      const { least, most } = extremes(s, `${name}.flow`, flow as number);
      // A tank that is filled by one flow and emptied by another can run dry, and then its pump stops.
      const runsDry = m.kind === 'tank' && !isOwn(s.tanks[m.index].from, m.index);
      const stops = runsDry || s.upsets.some((u) => u.quantity === `${name}.pump`);
      return { least: stops ? 0 : least, most };
    },
    take: (b, whole) => {
      if ('share' in b.take) {
        const share = shareOf(b);
        return { least: whole.least * share.least, most: whole.most * Math.min(1, share.most) };
      }
      const q = extremes(s, `${b.name}.flow`, b.take.flow);
      return { least: Math.min(q.least, whole.least), most: Math.min(q.most, whole.most) };
    },
    rest: (whole, takes, branches) => {
      if (branches.some((b) => 'flow' in b.take)) return ranges.sub(whole, ranges.add(...takes));
      const taken = ranges.add(...branches.map(shareOf));
      return {
        least: whole.least * Math.max(0, 1 - taken.most),
        most: whole.most * Math.max(0, 1 - taken.least),
      };
    },
  });
}

/** At the flows of time zero there must be what branches and draws are to take. */
function enoughToTake(s: Scenario, net: Network): Problem[] {
  const set = setFlows(s, net);
  const short = (branches: readonly Branch[], path: (name: string) => Path): Problem[] => {
    if (branches.length === 0) return [];
    const whole = set.whole(branches[0].name);
    const taken = branches.reduce((n, b) => n + ('share' in b.take ? b.take.share * whole : b.take.flow), 0);
    // A stream that is used up further upstream has its complaint there.
    if (taken < whole || whole <= 0) return [];
    const message = `takes ${show(3600 * taken)} m^3/h${branches.length > 1 ? ' with the others' : ''} of a stream of ${show(3600 * whole)} m^3/h, which leaves nothing; take less`;
    return [{ path: path(branches[branches.length - 1].name), message }];
  };
  return [
    ...s.splits.flatMap((q) => short(q.branches, (name) => ['splits', q.stream, name])),
    ...s.trains.flatMap((t) =>
      t.stages.flatMap((stage, j) =>
        PHASES.flatMap((phase) =>
          short(
            stage.draws.filter((d) => d.phase === phase),
            (name) => ['trains', t.name, `stage ${j + 1}`, 'draws', name],
          ),
        ),
      ),
    ),
  ];
}

const show = (v: number): string => String(Number(v.toPrecision(4)));
