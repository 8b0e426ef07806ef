import { add, constant, div, type Expr, max, mul, select, sub } from '../../math/expression.ts';
import type { Law } from '../../scenario/scenario.ts';
import type { LawKind, Local, Member } from './law.ts';

type Langmuir = Extract<Law, { law: 'langmuir' }>;

/** Share of the sites that must stay free: beyond it 1/(1 − Σθ) goes on along its tangent. */
const FREE = 0.001;

const loading = ({ solute, q: [capacity] }: Member<Langmuir>, at: Local): Expr =>
  div(at.organic[solute], capacity);

/**
 * Langmuir (1918), several solutes on the same sites: with θᵢ = c_o,i/capacityᵢ,
 *   c*_a,i = θᵢ/(bᵢ(1 − Σθ)),  c*_o,i = capacityᵢ·bᵢ·c_a,i/(1 + Σ bⱼ·c_a,j).
 */
export const langmuir: LawKind<Langmuir> = {
  numbers: (l) => [
    { name: 'capacity', unit: 'kg/m^3', value: l.capacity },
    { name: 'affinity', unit: 'm^3/kg', value: l.affinity },
  ],
  structure: () => '',
  aqueous(self, at, peers) {
    const free = sub(1, add(...peers.map((m) => max(loading(m, at), 0))));
    const tangent = add(1 / FREE, mul(1 / FREE ** 2, sub(FREE, free)));
    const perFree = select(sub(free, FREE), div(1, free), tangent);
    return mul(div(loading(self, at), self.q[1]), perFree);
  },
  organic({ solute, q: [capacity, b] }, at, peers) {
    const taken = peers.map((m) => mul(m.q[1], max(at.aqueous[m.solute], 0)));
    return div(mul(capacity, b, at.aqueous[solute]), add(constant(1), ...taken));
  },
};
