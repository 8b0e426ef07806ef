import { add, div, type Expr, mul, sub } from '../math/expression.ts';
import { type Kernel, kernel } from '../math/kernel.ts';
import { smoothStep } from '../math/shapes.ts';
import type { Mixer, Scenario } from '../scenario/scenario.ts';
import { type Chemistry, speciesFrom } from './chemistry.ts';
import { perVolume } from './kernels.ts';

/** A phase counts as vanishing below this share of the mixer. */
export const VANISHING = 1e-4;
/** Hold-up at which the interfacial area starts to feel that a phase runs out. */
const RUNS_OUT = 0.02;
/** Share of the mixer that counts as a trace of a phase: too little to have an interface. */
const TRACE = 1e-3;

/** 1 as long as there is more than a trace of a phase. */
const present = (share: Expr): Expr => smoothStep(div(share, TRACE));

/**
 * How the interfacial area follows the hold-ups: proportional to what is dispersed as long as there is a
 * continuous phase; `fixed`, independent of it. Vanishes with either phase, faster than the phase itself: what is
 * left of a phase that runs out would otherwise be exchanged for ever at a rate that its noise decides.
 */
export function area(dispersed: Expr, continuous: Expr, fixed: boolean): Expr {
  const both = mul(dispersed, continuous, present(dispersed), present(continuous));
  const bound = add(continuous, RUNS_OUT);
  return fixed ? div(both, mul(add(dispersed, RUNS_OUT), bound)) : div(both, bound);
}

const kernels = new Map<string, Kernel>();

/**
 * Transfer in one mixer, all solutes of the train: with the overall coefficient on the aqueous side
 *   Nᵢ = K_a·a·V·(c_a,i − c*_a,i(c_o)),
 * on the organic side N_i = K_o·a·V·(c*_o,i(c_a) − c_o,i); K·a is given at the design hold-up and goes with the
 * area g(φ)/g(φ₀). Output i is the flux of the i-th transferring solute from the aqueous to the organic.
 *
 * Arguments: V_a, V_o, V, least volume, K·a, g(φ₀), running; m_a and m_o of all solutes; w of all species; the
 * releases that are not zero; the numbers of the laws.
 */
export function transferKernel(s: Scenario, mixer: Mixer, c: Chemistry): Kernel {
  const fixed = mixer.transfer.given === 'ka' && mixer.transfer.fixed;
  const releasing = s.releases.map((row) => row.map((r) => (r === 0 ? '0' : 'r')).join('')).join('|');
  const key = [
    c.structure,
    mixer.side,
    mixer.continuity,
    fixed,
    s.solutes.length,
    s.species.length,
    releasing,
  ].join('/');
  const found = kernels.get(key);
  if (found) return found;
  const n = s.solutes.length;
  const names = [
    ...['aqueous volume', 'organic volume', 'volume', 'least', 'ka', 'design area', 'running'],
    ...s.solutes.flatMap((x) => [`aqueous ${x}`, `organic ${x}`]),
    ...s.species,
    ...s.releases.flatMap((row, i) => row.flatMap((r, k) => (r === 0 ? [] : [`release ${i} ${k}`]))),
    ...c.numbers.map((q) => q.name),
  ];
  const made = kernel(`transfer ${key}`, names, (...args) => {
    const [Va, Vo, V, least, ka, designArea, running] = args;
    let at = 7;
    const take = (count: number): Expr[] => {
      at += count;
      return args.slice(at - count, at);
    };
    const amounts = take(2 * n);
    const carriers = take(s.species.length);
    const releases = s.releases.map((row) => row.map((r) => (r === 0 ? null : take(1)[0])));
    const q = take(c.numbers.length);
    const perA = perVolume(Va, least);
    const perO = perVolume(Vo, least);
    const inAqueous = s.solutes.map((_, i) => amounts[2 * i]);
    const local = {
      aqueous: inAqueous.map((m) => mul(m, perA)),
      organic: s.solutes.map((_, i) => mul(amounts[2 * i + 1], perO)),
      species: speciesFrom(carriers, inAqueous, releases, perA),
    };
    const share = { aqueous: div(Va, V), organic: div(Vo, V) };
    const dispersed = mixer.continuity === 'aqueous' ? share.organic : share.aqueous;
    const continuous = share[mixer.continuity];
    const rate = mul(ka, V, running, div(area(dispersed, continuous, fixed), designArea));
    return c.solutes.map((i) => {
      const star = c.equilibrium(i, mixer.side, local, q);
      return mul(rate, mixer.side === 'aqueous' ? sub(local.aqueous[i], star) : sub(star, local.organic[i]));
    });
  });
  // Kernels of tables and formulas belong to one scenario; keeping them would keep its data for ever.
  if (!/table|formula/.test(c.structure)) kernels.set(key, made);
  return made;
}
