import {
  add,
  call,
  constant,
  div,
  type Expr,
  max,
  mul,
  pow,
  type Special,
  select,
  sqrt,
  sub,
} from '../../math/expression.ts';
import { risingRoot } from '../../math/roots.ts';
import type { Law } from '../../scenario/scenario.ts';
import type { LawKind, Local, Member } from './law.ts';

type Exchange = Extract<Law, { law: 'exchange' }>;

/** Share of the extractant below which the loading counts as overload. */
const FREE = 1e-3;
/** kg/m³: powers of acid are taken of a value that stays positive, δ of physics "x₊ = ½(x + √(x² + 4δ²))". */
const ACID = 1e-6;

/**
 * Distribution ratios beyond this can be told from no other: where acid is used up the law stops here, since c_a would
 * be a figure of the rounding alone.
 */
const LARGEST = 1e6;

const positive = (x: Expr): Expr => mul(0.5, add(x, sqrt(add(mul(x, x), 4 * ACID * ACID))));

/**
 * Mass action of a cation exchanger (e.g. M²⁺ + 2 HR = MR₂ + 2 H⁺): D = K·F^p/acid^q with the free extractant
 * F = E − Σ nᵢ·c_o,i; everything in g/L. One law serves extraction at low acid and stripping at high acid.
 */
export const exchange: LawKind<Exchange> = {
  numbers: (l) => [
    { name: 'constant', unit: '', value: l.constant },
    { name: 'extractant', unit: 'kg/m^3', value: l.extractant },
    { name: 'per_solute', unit: '', value: l.perSolute },
    { name: 'p', unit: '', value: l.p },
    { name: 'q', unit: '', value: l.q },
  ],
  structure: (l) => [exponent(l.p), exponent(l.q), l.acid].join(),
  aqueous(self, at, peers) {
    const [K, E] = self.q;
    const acid = acidTerm(self, at);
    const used = peers.map((m) => mul(m.q[2], max(at.organic[m.solute], 0)));
    const free = sub(E, add(...used));
    const p = power(self, 'p');
    const least = mul(FREE, E);
    const atLeast = pow(least, mul(-1, p));
    // 1/F^p, continued below the least free extractant by its tangent.
    const tangent = add(atLeast, div(mul(p, atLeast, sub(least, free)), least));
    const perFree = select(sub(free, least), pow(free, mul(-1, p)), tangent);
    return div(mul(at.organic[self.solute], acid, perFree), K);
  },
  organic(self, at, peers) {
    const free = freeExtractant(at, peers);
    return mul(strength(self, at), pow(free, power(self, 'p')), at.aqueous[self.solute]);
  },
};

/** Small whole exponents are part of the structure (a product is faster than a power); others are numbers. */
const exponent = (v: number): string => (v === 1 || v === 2 || v === 3 ? String(v) : 'any');

function power(m: Member<Exchange>, which: 'p' | 'q'): Expr {
  const v = m.law[which];
  if (exponent(v) !== 'any') return constant(v);
  return m.q[which === 'p' ? 3 : 4];
}

/** acid^q, no less than gives the largest distribution ratio with all extractant free: K·E^p/D. */
const acidTerm = (m: Member<Exchange>, at: Local): Expr => {
  const [K, E] = m.q;
  const least = div(mul(K, pow(E, power(m, 'p'))), LARGEST);
  return max(pow(positive(at.species[m.law.acid]), power(m, 'q')), least);
};

/** K/acid^q: the distribution ratio per F^p. */
const strength = (m: Member<Exchange>, at: Local): Expr => div(m.q[0], acidTerm(m, at));

/** F as the root of F + Σ aᵢ·F^pᵢ = E with aᵢ = nᵢ·Kᵢ·c_a,i/acid^qᵢ: rising in F, one root in 0…E. */
function freeExtractant(at: Local, peers: readonly Member<Exchange>[]): Expr {
  const E = peers[0].q[1];
  const args = peers.flatMap((m) => [
    mul(m.q[2], strength(m, at), max(at.aqueous[m.solute], 0)),
    power(m, 'p'),
  ]);
  return call(balance, E, ...args);
}

const balance: Special = {
  name: 'free extractant',
  evaluate(E, ...terms) {
    const sum = (F: number): number => {
      let s = F - E;
      for (let i = 0; i < terms.length; i += 2) s += terms[i] * F ** terms[i + 1];
      return s;
    };
    const slope = (F: number): number => {
      let s = 1;
      for (let i = 0; i < terms.length; i += 2) s += terms[i] * terms[i + 1] * F ** (terms[i + 1] - 1);
      return s;
    };
    return risingRoot(sum, slope, 0, E, E / 2).value;
  },
  partials([, ...terms], F) {
    const pairs = Array.from({ length: terms.length / 2 }, (_, i) => [terms[2 * i], terms[2 * i + 1]]);
    const slope = add(1, ...pairs.map(([a, p]) => mul(a, p, pow(F, sub(p, 1)))));
    // Exponents do not move during a run, so their partials are never asked for.
    return [div(1, slope), ...pairs.flatMap(([, p]) => [div(mul(-1, pow(F, p)), slope), constant(0)])];
  },
};
