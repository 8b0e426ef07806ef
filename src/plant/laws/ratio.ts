import { div, mul } from '../../math/expression.ts';
import type { Law } from '../../scenario/scenario.ts';
import type { LawKind } from './law.ts';

type Ratio = Extract<Law, { law: 'ratio' }>;

/** Constant distribution ratio (Nernst's distribution law, 1891): c_o = D·c_a. */
export const ratio: LawKind<Ratio> = {
  numbers: (l) => [{ name: 'ratio', unit: '', value: l.ratio }],
  structure: () => '',
  aqueous: ({ solute, q: [D] }, at) => div(at.organic[solute], D),
  organic: ({ solute, q: [D] }, at) => mul(at.aqueous[solute], D),
};
