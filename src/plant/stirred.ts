import { add, div, type Expr, input, max, mul, select, sub } from '../math/expression.ts';
import { type Kernel, kernel } from '../math/kernel.ts';
import { substitute } from '../math/substitute.ts';
import type { DropSizeName } from '../scenario/plain.ts';
import {
  continuousFilm,
  dispersedFilm,
  dispersing,
  dropDiameter,
  leastSpeed,
  power,
  type Stirred,
  specificArea,
} from './agitator.ts';
import { interfaceConcentration } from './interface.ts';
import { perVolume } from './kernels.ts';
import type { Contact } from './transfer.ts';

/** Arguments of the agitator model, in this order, then the diffusivities of each transferring solute (aqueous, organic). */
export const stirredArgs = [
  ...['speed', 'diameter', 'vessel', 'power number'],
  ...[
    'aqueous density',
    'organic density',
    'aqueous viscosity',
    'organic viscosity',
    'tension',
    'design speed',
  ],
] as const;

/** Speed below which drops are no longer followed to infinity, as a share of the design speed. */
const STILL = 1e-3;

/** The two phases as continuous and dispersed, for one continuity. */
function stirred(
  own: readonly Expr[],
  share: Contact['share'],
  organicContinuous: boolean,
  running: Expr,
): Stirred {
  const [speed, diameter, vessel, powerNumber, ra, ro, ma, mo, tension, design] = own;
  const pick = <T>(organic: T, aqueous: T): { c: T; d: T } =>
    organicContinuous ? { c: organic, d: aqueous } : { c: aqueous, d: organic };
  const density = pick(ro, ra);
  const viscosity = pick(mo, ma);
  const held = pick(share.organic, share.aqueous);
  return {
    speed: max(mul(speed, running), mul(STILL, design)),
    diameter,
    vessel,
    powerNumber,
    continuousDensity: density.c,
    dispersedDensity: density.d,
    continuousViscosity: viscosity.c,
    dispersedViscosity: viscosity.d,
    tension,
    dispersed: held.d,
    continuous: held.c,
  };
}

/**
 * Transfer through both films with the interface solved: with x the aqueous concentration at the interface,
 * f(x) + r·x = c_o + r·c_a, r = k_a/k_o, N = k_a·a·V·(c_a − x). The product k·a goes to zero with the agitator.
 */
export function stirredTransfer(c: Contact, drops: DropSizeName, own: readonly Expr[]): Expr[] {
  const { solutes } = c.chemistry;
  const args = own.slice(0, stirredArgs.length);
  const diffusivity = own.slice(stirredArgs.length);
  const [organic, aqueous] = [true, false].map((organicContinuous) => {
    const s = stirred(args, c.share, organicContinuous, c.running);
    const d32 = dropDiameter(drops, s);
    const active = mul(specificArea(s, d32), dispersing(s));
    return solutes.map((_, k) => {
      const [da, dd] = [diffusivity[2 * k], diffusivity[2 * k + 1]];
      const inAqueous = organicContinuous ? dispersedFilm(d32, da) : continuousFilm(s, d32, da);
      const inOrganic = organicContinuous ? continuousFilm(s, d32, dd) : dispersedFilm(d32, dd);
      return { inAqueous, inOrganic, active };
    });
  });
  return solutes.map((i, k) => {
    const by = (f: 'inAqueous' | 'inOrganic' | 'active'): Expr =>
      c.byContinuity(organic[k][f], aqueous[k][f]);
    const ka = by('inAqueous');
    const r = div(ka, by('inOrganic'));
    const b = add(c.local.organic[i], mul(r, c.local.aqueous[i]));
    const x = atInterface(c, i, b, r);
    return mul(ka, by('active'), c.volume, add(c.local.aqueous[i], mul(-1, x)));
  });
}

/** The law as a curve of the interface concentration; other components as they are in the bulk. */
function atInterface(c: Contact, solute: number, b: Expr, r: Expr): Expr {
  const { aqueous, species } = c.local;
  const rest = [...aqueous.filter((_, i) => i !== solute), ...species, ...c.q];
  let at = 0;
  const next = (): Expr => {
    at += 1;
    return input(at);
  };
  const curveAqueous = aqueous.map((_, i) => (i === solute ? input(0) : next()));
  const curveSpecies = species.map(() => next());
  const curveQ = c.q.map(() => next());
  const local = { aqueous: curveAqueous, organic: aqueous.map(() => input(0)), species: curveSpecies };
  const curve = c.chemistry.equilibrium(solute, 'organic', local, curveQ);
  return interfaceConcentration(
    substitute(curve, [input(0), ...rest.map((_, i) => input(i + 1))]),
    rest.length + 1,
    b,
    r,
    rest,
  );
}

const shown = new Map<DropSizeName, Kernel>();

/** What a reader wants to know of an agitator: d₃₂ [m], a [1/m], power [W], N/N_min. */
export function agitatorFigures(drops: DropSizeName): Kernel {
  const found = shown.get(drops);
  if (found) return found;
  const names = ['aqueous volume', 'organic volume', 'least', 'continuity', 'running', ...stirredArgs];
  const made = kernel(`agitator ${drops}`, names, (Va, Vo, least, continuity, running, ...own) => {
    const V = add(Va, Vo);
    const share = { aqueous: mul(Va, perVolume(V, least)), organic: mul(Vo, perVolume(V, least)) };
    const figures = [true, false].map((organicContinuous) => {
      const s = stirred(own, share, organicContinuous, running);
      const d32 = dropDiameter(drops, s);
      return [d32, specificArea(s, d32), mul(power(s), running), div(mul(s.speed, running), leastSpeed(s))];
    });
    return figures[0].map((organic, i) => select(sub(continuity, 0.5), organic, figures[1][i]));
  });
  shown.set(drops, made);
  return made;
}
