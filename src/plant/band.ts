import { add, constant, div, type Expr, max, mul, select, sub } from '../math/expression.ts';
import { type Kernel, kernel } from '../math/kernel.ts';
import { smoothStep } from '../math/shapes.ts';
import type { Band, BandPoint, Stage } from '../scenario/scenario.ts';
import { coalescedByHyperbola, coalescedByPower, floodedShare } from './band-law.ts';
import type { Book } from './book.ts';
import { BAND_DRAINS, hyperbola } from './design.ts';
import type { Ref } from './ledger.ts';

/** Continuous share of the mixer below which no band forms: there is nothing for the drops to sit in. */
const NO_CONTINUOUS = 0.05;

/** What a band does with what enters it, m³/s. */
export interface BandFlows {
  /** Share of the mixer overflow that enters the band; the rest goes straight to the layers. */
  readonly enters: Ref;
  /** Out of the band into the clear layers. */
  readonly aqueous: Ref;
  readonly organic: Ref;
  /** Dispersed phase that leaves with the outlet of the continuous one. */
  readonly floodAqueous: Ref;
  readonly floodOrganic: Ref;
  /** m */
  readonly thickness: Ref;
}

interface BandRefs {
  readonly band: { readonly aqueous: Ref; readonly organic: Ref };
  readonly layer: { readonly aqueous: Ref; readonly organic: Ref };
  readonly mixer: { readonly aqueous: Ref; readonly organic: Ref };
  /** Flow of each phase that counts as the load when the band floods. */
  readonly load: { readonly aqueous: Ref; readonly organic: Ref };
  /** 1: organic continuous, 0: aqueous continuous. */
  readonly continuity: Ref;
}

const kernels = new Map<string, Kernel>();
const shape = (b: BandPoint): string => ('exponent' in b.law ? 'power' : 'hyperbola');

/**
 * The dispersion band of a settler: drops of the dispersed phase, at a constant share, in the continuous one.
 *
 * dV_d/dt = Q_d − Q_coalesced(H) − flooded, H = V_d/(A·ε); the continuous phase between the drops drains to V_d(1 − ε)/ε
 * within seconds. Once H reaches the depth of the continuous layer, the drops leave with its outlet: flooding.
 */
export function writeBand(book: Book, path: string, stage: Stage, area: Ref, r: BandRefs): BandFlows {
  const band = stage.settler.band as Band;
  const one = pointNumbers(book, path, band, band.coalescer);
  const two = pointNumbers(book, `${path}.other`, band.other ?? band, band.coalescer);
  const own =
    stage.mixer.continuity === 'organic' ? { organic: one, aqueous: two } : { organic: two, aqueous: one };
  const laws = stage.mixer.continuity === 'organic' ? [band, band.other ?? band] : [band.other ?? band, band];
  const [enters, aqueous, organic, floodAqueous, floodOrganic, thickness] = book.ledger.signal(
    bandKernel(shape(laws[0]), shape(laws[1])),
    ...[area, book.number(band.holdUp), r.continuity],
    ...[r.band.aqueous, r.band.organic, r.layer.aqueous, r.layer.organic, r.mixer.aqueous, r.mixer.organic],
    ...[r.load.aqueous, r.load.organic],
    ...own.organic,
    ...own.aqueous,
  );
  return { enters, aqueous, organic, floodAqueous, floodOrganic, thickness };
}

/** κ and p of the power law, or k₁ and k₂, as parameters of the stage. */
function pointNumbers(book: Book, path: string, b: BandPoint, coalescer: number): [Ref, Ref] {
  if ('exponent' in b.law) {
    const kappa = (coalescer * b.thickness) / b.at ** b.law.exponent;
    return [book.ledger.parameter(`${path}.band.kappa`, '', kappa), book.number(b.law.exponent)];
  }
  const { k1, k2 } = hyperbola(b);
  return [book.ledger.parameter(`${path}.band.k1`, 's', k1 * coalescer), book.number(k2)];
}

function bandKernel(organicLaw: string, aqueousLaw: string): Kernel {
  const key = `${organicLaw}/${aqueousLaw}`;
  const found = kernels.get(key);
  if (found) return found;
  const names = [
    'area',
    'hold-up',
    'continuity',
    'band aqueous',
    'band organic',
    'layer aqueous',
    'layer organic',
    'mixer aqueous',
    'mixer organic',
    'load aqueous',
    'load organic',
    'organic 1',
    'organic 2',
    'aqueous 1',
    'aqueous 2',
  ];
  const made = kernel(`band ${key}`, names, (...a) => {
    const [A, eps, mode, Ba, Bo, La, Lo, Ma, Mo, Qa, Qo, o1, o2, a1, a2] = a;
    const organicContinuous = (yes: Expr, no: Expr): Expr => select(sub(mode, 0.5), yes, no);
    const coalesced = (law: string, H: Expr, p: Expr, q: Expr): Expr =>
      law === 'power' ? coalescedByPower(H, A, p, q) : coalescedByHyperbola(H, A, p, q);
    const drops = organicContinuous(Ba, Bo);
    const between = organicContinuous(Bo, Ba);
    const H = div(drops, mul(A, eps));
    const merging = organicContinuous(coalesced(organicLaw, H, o1, o2), coalesced(aqueousLaw, H, a1, a2));
    // Soft above zero, so that the continuous phase never runs back: z²/(z + d) rises like z once z ≫ d.
    const over = div(sub(between, div(mul(drops, sub(1, eps)), eps)), BAND_DRAINS);
    const draining = softPositive(over, mul(1e-3, A, 1e-3));
    const enters = smoothStep(
      div(organicContinuous(div(Mo, add(Ma, Mo)), div(Ma, add(Ma, Mo))), NO_CONTINUOUS),
    );
    const deepest = div(max(organicContinuous(Lo, La), mul(1e-3, A)), A);
    const flooding = mul(enters, organicContinuous(Qa, Qo), floodedShare(H, deepest));
    const zero = constant(0);
    return [
      enters,
      organicContinuous(merging, draining),
      organicContinuous(draining, merging),
      organicContinuous(flooding, zero),
      organicContinuous(zero, flooding),
      H,
    ];
  });
  kernels.set(key, made);
  return made;
}

/** 0 below zero, z²/(z + d) above: C1. */
const softPositive = (z: Expr, d: Expr): Expr => select(z, div(mul(z, z), add(z, d)), 0);
