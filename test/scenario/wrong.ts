import { expect, it } from 'vitest';
import { assemble } from '../../src/plant/assemble.ts';
import { readScenario, ScenarioError } from '../../src/scenario/read.ts';
import { Refusal } from '../../src/scenario/refusal.ts';
import { inRepo } from '../support/plants.ts';

/** A plant without a fault. The lines are counted in the tests. */
export const sound = `title: Plain plant
solutes: [copper]
species: [acid]
feeds:
  liquor: {phase: aqueous, flow: 420 m^3/h, copper: 5.2 g/L, acid: 1.8 g/L}
  lean: {phase: organic, flow: 430 m^3/h, copper: 2 g/L}
trains:
  extraction:
    stages: 3
    aqueous: liquor -> raffinate
    organic: lean -> loaded
    mixer: {volume: 42 m^3, stage_efficiency: 94 %}
    settler: {area: 180 m^2, aqueous_depth: 0.35 m, organic_depth: 0.30 m}
    equilibrium: {copper: {law: ratio, ratio: 3}}
horizon: 10 h
record_every: 10 min
upsets:
  - {at: 2 h, change: liquor.copper, by: +35 %}
limits:
  - {keep: raffinate.copper, below: 0.6 g/L}
`;

/** The same with a closed organic loop; the tank stands in line 6, and two lines more in all. */
export const closed = exchange(
  sound,
  '  lean: {phase: organic, flow: 430 m^3/h, copper: 2 g/L}\n',
  'tanks:\n  tank: {phase: organic, from: loaded, to: lean, volume: 100 m^3, filled: 70 %, flow: 430 m^3/h}\n',
);

/** Pieces of a text exchanged for others; each must stand in it exactly once. */
export function exchange(text: string, ...pieces: readonly string[]): string {
  let made = text;
  for (let i = 0; i < pieces.length; i += 2) {
    const parts = made.split(pieces[i]);
    if (parts.length !== 2) throw new Error(`'${pieces[i]}' stands ${parts.length - 1} times in the text`);
    made = parts.join(pieces[i + 1]);
  }
  return made;
}

/** The sound plant with pieces exchanged. */
export const instead = (...pieces: readonly string[]): string => exchange(sound, ...pieces);

/** What the program says to a scenario, line by line; nothing where it takes it. */
export function answer(text: string, folder = inRepo('scenarios')): readonly string[] {
  try {
    const read = readScenario(text, { file: 'wrong.yaml', folder });
    try {
      assemble(read.scenario);
    } catch (e) {
      if (e instanceof Refusal) throw read.refuse(e);
      throw e;
    }
    return [];
  } catch (e) {
    // Anything else is a crash, and fails the test with its own stack.
    if (e instanceof ScenarioError) return e.message.split('\n');
    throw e;
  }
}

/** A complaint: `line:column path`, then words that must stand in it. */
export type Complaint = readonly [place: string, ...words: string[]];

export function expectRefusal(text: string, complaints: readonly Complaint[], folder?: string): void {
  const lines = answer(text, folder);
  expect(lines).toHaveLength(complaints.length);
  complaints.forEach(([place, ...words], i) => {
    const said = lines[i].slice('wrong.yaml:'.length);
    expect(said.slice(0, place.length)).toBe(place);
    expect(said[place.length]).toMatch(/[ :]/);
    for (const word of words) expect(lines[i]).toContain(word);
  });
}

export type Case = readonly [what: string, text: string, ...complaints: Complaint[]];

export function refuses(cases: readonly Case[]): void {
  it.each(cases.map(([what, ...rest]) => ({ what, rest })))('$what', ({ rest }) => {
    const [text, ...complaints] = rest;
    expectRefusal(text, complaints);
  });
}
