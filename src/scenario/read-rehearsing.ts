import { type RawAnalyser, readAnalyser } from './analyser.ts';
import { readChange } from './changes.ts';
import { removalShares } from './circuit.ts';
import { concentration, contentKinds } from './content.ts';
import type { Figure } from './fields.ts';
import { statedChanges } from './loop-changes.ts';
import { checkOwner } from './loop-ownership.ts';
import { type Frame, readBegin, readClock, readEnd, readWhen } from './moment.ts';
import { hint } from './nearest.ts';
import { checkNeeds } from './needs.ts';
import type { Surroundings } from './read-commissioning.ts';
import type { Problem } from './refusal.ts';
import type { Answer, Begin, Instrument, Rehearsing, Step } from './rehearsing.ts';
import type { Change, Path, Scenario } from './scenario.ts';
import type { RawScenario } from './schema.ts';
import { show } from './show.ts';
import { quantity } from './units.ts';
import { readVariations } from './variation.ts';

type RawAnswer = NonNullable<RawScenario['answers']>[string];
type Level = { readonly is: number } | { readonly wrong: string };

/** Answers tried in one rehearsal: more make no table that anybody reads. */
const MOST_ANSWERS = 24;

/** The keys for the rehearsal of a scenario that is built; complains in place. */
export function readRehearsing(
  raw: RawScenario,
  s: Scenario,
  around: Surroundings,
  problems: Problem[],
): Rehearsing {
  const instruments = Object.entries(raw.analysers ?? {}).flatMap(
    ([name, q]) => instrumentOf(name, q, around, problems) ?? [],
  );
  const upsets = new Set(statedChanges(s).map((u) => `${u.at} ${u.words}`)).size;
  const frame: Frame = {
    upsets,
    instruments,
    quantities: [...around.outline.limitable.keys()],
    value: (text, path) => levelOf(text, path, around),
  };
  const entries = Object.entries(raw.answers ?? {});
  if (entries.length > MOST_ANSWERS)
    problems.push({
      path: ['answers'],
      message: `has ${entries.length} answers, more than ${MOST_ANSWERS}; take some out`,
    });
  const reader = new AnswerReader(raw, s, around, frame, problems);
  const timeZero = raw.time_zero === undefined ? null : readClock(raw.time_zero);
  if (raw.time_zero !== undefined && timeZero === null)
    problems.push({
      path: ['time_zero'],
      message: `expected a clock time such as '2026-03-01 06:00', got ${show(raw.time_zero)}`,
    });
  return {
    answers: entries.map(([name, a]) => reader.read(name, a)),
    instruments,
    variations: readVariations(raw, s, around, problems),
    startStated: raw.start !== undefined,
    timeZero,
  };
}

function levelOf(text: string | number, path: string, { outline, basis }: Surroundings): Level {
  const target = outline.limitable.get(path);
  if (target?.component === undefined) {
    const kinds = target?.what === 'volume' ? (['a volume'] as const) : (['a flow by volume'] as const);
    const q = quantity(text, ...kinds);
    return 'wrong' in q ? q : { is: q.value };
  }
  if (target.what === 'purity') {
    const q = quantity(text, 'a percentage');
    return 'wrong' in q ? q : { is: 100 * q.value };
  }
  const q = quantity(text, ...contentKinds.filter((k) => k !== 'a mass fraction'));
  if ('wrong' in q) return q;
  const found: Problem[] = [];
  const is = concentration(q, target.component, target.phase, basis, [], found);
  return found.length > 0 ? { wrong: found[0].message } : { is };
}

function instrumentOf(
  name: string,
  raw: NonNullable<RawScenario['analysers']>[string],
  around: Surroundings,
  problems: Problem[],
): Instrument | null {
  const path = ['analysers', name];
  const complain = (message: string, ...at: string[]): null => {
    problems.push({ path: [...path, ...at], message, ...(at.length === 0 ? { atKey: true } : {}) });
    return null;
  };
  if (/[.,:#"]|->|\b(above|below)\b/.test(name) || name.trim() === '')
    complain("a name must not hold '. , : # ->', nor the words above and below");
  const target = around.outline.limitable.get(raw.of);
  if (target?.what !== 'content' || target.component === undefined) {
    const known = [...around.outline.limitable].filter(([, t]) => t.what === 'content').map(([k]) => k);
    return complain(
      target === undefined
        ? `unknown quantity ${show(raw.of)}${hint(raw.of, known)}`
        : `an analyser measures a concentration; ${show(raw.of)} is none; write one such as raffinate.copper, by your names`,
      'of',
    );
  }
  const { of, warn, ...settings } = raw;
  const own = readAnalyser(
    settings as RawAnalyser,
    target.component,
    target.phase,
    around.basis,
    path,
    problems,
  );
  const level = warn === undefined ? null : levelOf(warn, of, around);
  if (level !== null && 'wrong' in level) complain(level.wrong, 'warn');
  return { name, quantity: of, warn: level !== null && 'is' in level ? level.is : null, ...own };
}

class AnswerReader {
  readonly #raw: RawScenario;
  readonly #s: Scenario;
  readonly #around: Surroundings;
  readonly #frame: Frame;
  readonly #problems: Problem[];

  constructor(raw: RawScenario, s: Scenario, around: Surroundings, frame: Frame, problems: Problem[]) {
    this.#raw = raw;
    this.#s = s;
    this.#around = around;
    this.#frame = frame;
    this.#problems = problems;
  }

  read(name: string, a: RawAnswer): Answer {
    const between = a.between?.value ?? 0;
    if (/[.,:#"]|->/.test(name)) this.#complain(name, [], "a name must not hold '. , : # ->'", true);
    if (name === 'nothing')
      this.#complain(name, [], "'nothing' is what is done without an answer; choose another name", true);
    if (a.sequence === undefined) {
      if (a.between) this.#complain(name, ['between'], 'belongs to a sequence; take it out');
      return { name, between, steps: [this.#step(name, a)] };
    }
    for (const key of ['start', 'when', 'ends', 'moves'] as const)
      if (a[key] !== undefined)
        this.#complain(
          name,
          [key],
          'a sequence takes it from the answers it is made of; take it out here',
          true,
        );
    if (a.sequence.length < 2)
      this.#complain(name, ['sequence'], 'expected the names of two or more answers');
    const known = Object.entries(this.#raw.answers ?? {});
    const steps = a.sequence.flatMap((part, i): Step[] => {
      const one = known.find(([n]) => n === part)?.[1];
      const single = known.filter(([, q]) => q.sequence === undefined).map(([n]) => n);
      if (one === undefined || one.sequence !== undefined) {
        const what = one === undefined ? `unknown answer ${show(part)}` : 'is itself a sequence';
        this.#complain(name, ['sequence', i], `${what}${one === undefined ? hint(part, single) : ''}`);
        return [];
      }
      // What is wrong with it is said where it stands.
      return [this.#step(part, one, [])];
    });
    return { name, between, steps };
  }

  #step(name: string, a: RawAnswer, problems: Problem[] = this.#problems): Step {
    const complain = (at: Path, message: string, atKey = false): void => {
      problems.push({ path: ['answers', name, ...at], message, atKey });
    };
    const { moves = [] } = a;
    if (moves.length === 0) complain([], 'says nothing: expected moves, or a sequence of answers');
    const made: Step = {
      name,
      begins: this.#begin(a, complain),
      ends: null,
      moves: moves.flatMap((m, i) => this.#move(name, m, i, problems)),
    };
    this.#needs(made, complain);
    if (a.ends === undefined) return made;
    const end = readEnd(a.ends, this.#frame);
    if ('wrong' in end) complain(['ends'], end.wrong);
    return 'wrong' in end ? made : { ...made, ends: end.is };
  }

  #begin(a: RawAnswer, complain: (at: Path, message: string) => void): Begin {
    const none: Begin = { at: 0 };
    if ((a.start === undefined) === (a.when === undefined)) {
      complain([], `expected one of start and when, got ${a.start === undefined ? 'neither' : 'both'}`);
      return none;
    }
    const read =
      a.start !== undefined ? readBegin(a.start, this.#frame) : readWhen(a.when ?? '', this.#frame);
    if ('is' in read) return read.is;
    complain([a.start !== undefined ? 'start' : 'when'], read.wrong);
    return none;
  }

  #move(
    name: string,
    m: NonNullable<RawAnswer['moves']>[number],
    i: number,
    problems: Problem[],
  ): readonly Change[] {
    const { outline, basis, contents, feeds, folder } = this.#around;
    const at: Figure = m.at ?? { kind: 'a time', value: 0, text: '0 h' };
    const horizon = { kind: 'a time', value: Number.POSITIVE_INFINITY, text: '' } as const;
    const shares = removalShares(this.#s.tanks, this.#s.solutes);
    const path = ['answers', name, 'moves', i];
    checkOwner(m, path, this.#s.loops ?? [], problems);
    const setting = { path, outline, basis, contents, shares, feeds, horizon, folder };
    return readChange({ ...m, at }, setting, problems);
  }

  /** What is asked of upsets is asked of moves. */
  #needs(step: Step, complain: (at: Path, message: string) => void): void {
    const before: Problem[] = [];
    const found: Problem[] = [];
    checkNeeds(this.#s, before);
    checkNeeds({ ...this.#s, upsets: step.moves }, found);
    for (const q of found) if (!before.some((b) => b.message === q.message)) complain(['moves'], q.message);
  }

  #complain(name: string, at: Path, message: string, atKey = false): void {
    this.#problems.push({ path: ['answers', name, ...at], message, atKey });
  }
}
