import type { Law } from '../../scenario/scenario.ts';
import { exchange } from './exchange.ts';
import { formulaLaw, type NameLookup } from './formula.ts';
import { freundlich } from './freundlich.ts';
import { langmuir } from './langmuir.ts';
import type { LawKind } from './law.ts';
import { ratio } from './ratio.ts';
import { table } from './table.ts';

/** All equilibrium laws by name. A new law is a file beside this one and a line here. */
export function lawKinds(lookup: NameLookup): Record<Law['law'], LawKind<never>> {
  return { ratio, langmuir, freundlich, table, exchange, formula: formulaLaw(lookup) };
}
