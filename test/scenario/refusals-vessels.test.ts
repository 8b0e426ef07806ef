import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { assemble } from '../../src/plant/assemble.ts';
import { readScenario, ScenarioError } from '../../src/scenario/read.ts';
import { Refusal } from '../../src/scenario/refusal.ts';
import { inRepo } from '../support/plants.ts';

const good = readFileSync(inRepo('scenarios/saltbush-vessels.yaml'), 'utf8');

/** What is said of the plant with one line changed. */
function said(from: string | RegExp, to: string): string {
  const text = good.replace(from, to);
  expect(text).not.toBe(good);
  try {
    const { scenario } = readScenario(text, { file: 'wrong.yaml', folder: inRepo('scenarios') });
    assemble(scenario);
  } catch (e) {
    if (e instanceof ScenarioError || e instanceof Refusal) return e.message;
    throw e;
  }
  return '';
}

describe('vessels that make no sense are refused with their place', () => {
  it.each([
    [
      'an agitator without properties',
      /^viscosities:.*\n/m,
      '',
      /trains\.extraction\.mixer\.impeller: .*needs viscosities\.aqueous, viscosities\.organic/,
    ],
    [
      'a diffusivity of nobody',
      '  copper: {aqueous: 7e-10',
      '  cooper: {aqueous: 7e-10',
      /diffusivities\.cooper: unknown solute 'cooper'.*copper/,
    ],
    ['an agitator in the wrong unit', 'speed: 50 rpm', 'speed: 50 m/s', /impeller\.speed: expected a rate/],
    [
      'an unknown correlation',
      'diameter: 1.9 m, power',
      'drops: mlynek, diameter: 1.9 m, power',
      /impeller\.drops: expected one of mlynek-resnick.*mlynek-resnick/,
    ],
    [
      'two rates',
      '      overflow_weir: 3 m\n',
      '      overflow_weir: 3 m\n      ka: 0.1 1/s\n',
      /extraction\.mixer: .*one of ka.*got both/,
    ],
    [
      'weirs without density',
      'densities: {aqueous: 1030 kg/m^3, organic: 820 kg/m^3}',
      'densities: {aqueous: 1030 kg/m^3}',
      /hydraulics: weirs need densities\.organic/,
    ],
    [
      'a heavy organic',
      'organic: 820 kg/m^3',
      'organic: 1120 kg/m^3',
      /densities\.organic: the organic must be lighter/,
    ],
    [
      'a settler without weirs',
      /^ {6}weirs: .*\n/m,
      '',
      /extraction\.settler: .*needs the weirs of every settler/,
    ],
    [
      'a band without a law',
      ', exponent: 3, other_continuity: {thickness: 9 cm, at: 2.4 m/h}',
      '',
      /settler\.band: the band needs one of exponent .* got neither/,
    ],
    [
      'a band that floods below its own point',
      'at: 1.1 m/h, exponent: 3',
      'at: 1.1 m/h, floods_at: 1 m/h',
      /band\.floods_at: must be more than at/,
    ],
    [
      'a second point of the band beyond its flood',
      'at: 2.4 m/h, exponent: 3, other_continuity: {thickness: 9 cm, at: 2.4 m/h}',
      'at: 2.4 m/h, floods_at: 4 m/h, other_continuity: {thickness: 9 cm, at: 5 m/h}',
      /band\.other_continuity\.at: must be less than floods_at: 4 m\/h, got 5 m\/h/,
    ],
    [
      'an organic layer that leaves no room under its weir',
      'organic_depth: 0.30 m',
      'organic_depth: 0.08 m',
      /trains\.extraction\.settler: .*stage 1: the organic layer must be deeper/,
    ],
    [
      'an aqueous layer below its own outlet',
      'weirs: {organic_length: 8 m, aqueous_length: 8 m}',
      'weirs: {organic_length: 8 m, aqueous_length: 8 m, port: 40 cm}',
      /trains\.extraction\.settler: .*deeper than the port of its outlet, 0\.4 m/,
    ],
    [
      'a mixer weir that would have to stand below the floor',
      'overflow_weir: 3 m',
      'overflow_weir: 1 cm',
      /trains\.extraction\.mixer: .*the head over its weir/,
    ],
    [
      'an empty start of full vessels',
      /hydraulics: weirs/g,
      'hydraulics: full',
      /start: an empty start needs hydraulics: weirs/,
    ],
    [
      'a word for a pump',
      'organic tank.pump, to: tripped',
      'organic tank.pump, to: triped',
      /upsets\.2\.to: a pump is set to 'tripped' or 'running', got 'triped'.*tripped/,
    ],
    [
      'a weir moved without a unit',
      'by: +3 cm',
      'by: 3',
      /upsets\.3\.by: .*two ways: write '3 %' or .* '3 cm'/,
    ],
    [
      'a feed swapped for none',
      'change: leach liquor.copper, by: +35 %',
      'change: leach liquor, to: other',
      /upsets\.0\.to: a feed is swapped to another feed, got 'other'/,
    ],
    [
      'a make-up of nobody',
      'passes: 50 %}',
      'passes: 50 %, make_up: fresh}',
      /make_up: nobody makes the stream 'fresh'/,
    ],
    ['a share above one', 'passes: 50 %', 'passes: 150 %', /passes: must not exceed 100 %/],
    [
      'an unknown key in a band',
      'thickness: 5 cm',
      'thicknes: 5 cm',
      /band\.thicknes: unknown key.*thickness/,
    ],
  ])('%s', (_, from, to, message) => {
    expect(said(from, to)).toMatch(message);
  });

  it('what is given in every place stands in its line', () => {
    const line = good.split('\n').findIndex((l) => l.includes('passes: 50 %')) + 1;
    expect(said('passes: 50 %', 'passes: 150 %')).toMatch(
      new RegExp(`^wrong\\.yaml:${line}:\\d+ tanks\\.organic tank\\.passes`),
    );
  });
});
