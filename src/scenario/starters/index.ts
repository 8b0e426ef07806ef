import { beaker } from './beaker.ts';
import { circuit, loop } from './circuit.ts';
import { parting } from './parting.ts';
import { single } from './single.ts';
import type { Starter } from './starter.ts';
import { vessels } from './vessels.ts';

export type { Starter, StarterNames } from './starter.ts';

/** Kinds of plants to begin with, the simplest first. */
export const starters: readonly Starter[] = [single, circuit, parting, loop, vessels, beaker];

/** A starter by its name. */
export const starterNamed = (name: string): Starter | undefined => starters.find((s) => s.name === name);
