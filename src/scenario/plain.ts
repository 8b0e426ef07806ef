import type { Mixer, Properties, Scenario, Settler, Stage, Tank, Train } from './scenario.ts';

/*
 * What a plant has that says nothing about the finer points of its vessels. Each default is stated here, once.
 */

export const plainMixer = {
  pumps: false,
  inversion: null,
  organicShare: null,
  overflow: { length: 1, area: 1 },
} as const satisfies Partial<Mixer>;

export const plainSettler = {
  shortCircuit: 0,
  band: null,
  carry: null,
  weirs: null,
} as const satisfies Partial<Settler>;

/** A stage without a settler. */
export const noSettler: Settler = { aqueous: 0, organic: 0, parts: 0, area: null, ...plainSettler };

export const plainStage = { takes: [], draws: [] } as const satisfies Partial<Stage>;

export const plainTrain = {
  hydraulics: 'full',
  recycle: null,
  arrangement: { kind: 'counter-current' },
  backFlow: { aqueous: 0, organic: 0 },
} as const satisfies Partial<Train>;

/** A plant in which no stream divides or runs together, and no vessel stands alone. */
export const plainCircuit = { splits: [], blends: [], batches: [] } as const satisfies Partial<Scenario>;

export const plainTank = { makeUp: null, passes: 0, removes: [] } as const satisfies Partial<Tank>;

/** Properties of which nothing is stated, for a number of solutes. */
export const noProperties = (solutes: number): Properties => ({
  density: { aqueous: null, organic: null },
  viscosity: { aqueous: null, organic: null },
  tension: null,
  diffusivity: Array.from({ length: solutes }, () => null),
});

/** Ambivalent range of the organic share of a mixer (common practice; from memory). */
export const usualInversion = { low: 0.25, high: 0.75 } as const;
/** Dispersed share of a band (common practice). */
export const usualBandHoldUp = 0.75;
/** Growth of entrainment with the throughput. */
export const usualCarryExponent = 2;
/** m: underflow port above the floor, and head lost in the aqueous leg. */
export const usualPort = 0.05;
export const usualLoss = 0.02;
/** Six-flat-blade turbine, fully turbulent (from memory). */
export const usualPowerNumber = 5.7;

/** Drop-size correlations by first authors; the first is the default. */
export const dropSizeNames = [
  'mlynek-resnick',
  'chen-middleman',
  'sprow',
  'calderbank-turbine',
  'calderbank-paddle',
  'brown-pitt',
  'van-heuven-beek',
  'coulaloglou-tavlarides',
  'gnanasundaram',
] as const;
export type DropSizeName = (typeof dropSizeNames)[number];
