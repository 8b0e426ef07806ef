/**
 * Ranges within which most plants of mixer-settlers run, in SI (common practice; from memory, and they differ from house
 * to house): outside of them a plant may well be right, but more often a figure was mistyped.
 */
export const usual = {
  /** s in the mixer of both phases together. */
  mixerTime: { low: 60, high: 300 },
  /** m³/(m²·s) of both phases on the settler. */
  settlerLoad: { low: 2 / 3600, high: 6 / 3600 },
  /** Organic to aqueous in the mixer, recycle included: beyond it the phase continuity is hard to choose. */
  mixerRatio: { low: 0.25, high: 4 },
  /** m of dispersion band, and its share of the layer that it lies in. */
  band: { low: 0, high: 0.15 },
  bandShare: { low: 0, high: 0.5 },
  /** Murphree efficiency of a stage. */
  efficiency: { low: 0.75, high: 0.995 },
  /** m/s at the tip of the impeller: slower leaves drops undispersed, faster makes them too fine to settle. */
  tipSpeed: { low: 2, high: 5.5 },
  /** Loaded organic, as a share of what the law lets it hold. */
  load: { low: 0, high: 0.95 },
} as const;

export type UsualName = keyof typeof usual;
