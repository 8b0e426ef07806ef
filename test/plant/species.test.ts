import { describe, expect, it } from 'vitest';
import { run } from '../../src/study/run.ts';
import { fromText, scenario } from '../support/plants.ts';

/** A strip by constant ratio that sets acid free when it extracts, so it takes acid up when it strips. */
const strip = (acid: number): string => `
title: strip
solutes: [metal]
species: [acid]
feeds:
  liquor: {phase: aqueous, flow: 10 m^3/h, acid: ${acid} g/L}
  loaded: {phase: organic, flow: 10 m^3/h, metal: 5 g/L}
trains:
  strip:
    stages: 1
    aqueous: liquor -> rich
    organic: loaded -> lean
    mixer: {volume: 1 m^3, stage_efficiency: 90 %}
    settler: {aqueous_volume: 1 m^3, organic_volume: 1 m^3}
    equilibrium: {metal: {law: formula, organic: 0.1*c_a, releases: {acid: 1.5}}}
horizon: 2 h
record_every: 10 min
`;

describe('acid that a law does not know of', () => {
  it('is missed when it is used up, with the time', () => {
    const r = run(fromText(strip(3)));
    expect(r.events).toHaveLength(1);
    expect(r.events[0].message).toMatch(/acid in strip\.1\.mixer is used up/);
    expect(r.events[0].time).toBeGreaterThan(0);
  });

  it('is not missed where there is enough of it', () => {
    expect(run(fromText(strip(30))).events).toEqual([]);
    expect(run(scenario('saltbush-copper')).events).toEqual([]);
  });
});
