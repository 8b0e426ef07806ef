import { readFileSync } from 'node:fs';
import { dirname, resolve } from 'node:path';
import { clearLine, createInterface, cursorTo } from 'node:readline';
import type { Readable, Writable } from 'node:stream';
import { exerciseHelp, scoreLines, viewLines } from '../../report/exercise-screen.ts';
import { rehearseSummary } from '../../report/rehearse-summary.ts';
import { upsetWords } from '../../report/rehearse-words.ts';
import { readScenario, ScenarioError } from '../../scenario/read.ts';
import {
  changeablePaths,
  exerciseName,
  type TypedMove,
  typedMove,
  withExercise,
} from '../../scenario/replay.ts';
import type { Scenario } from '../../scenario/scenario.ts';
import { quantity } from '../../scenario/units.ts';
import { Exercise, scoreOf } from '../../study/rehearse/exercise.ts';
import { rehearse } from '../../study/rehearse/rehearse.ts';
import { usual } from '../../study/run.ts';
import type { Console } from '../console.ts';
import { draw } from '../drawing.ts';
import { exits } from '../exit.ts';
import { makeFolder, openScenario, outputFolder, version, write, writeJson } from '../files.ts';
import { known, refusing } from '../refusing.ts';

export interface StepOptions {
  readonly out?: string;
  readonly pictures: boolean;
  readonly scale: string;
  readonly speed: number;
}

/** Where lines come from and go to; the clock runs by itself only on a terminal. */
export interface Terminal {
  readonly input: Readable & { readonly isTTY?: boolean };
  readonly output: Writable;
}

/** ms between two looks at the plant while the clock runs. */
const TICK = 500;

/** `upsettle rehearse FILE --step`: one engineer drives the plant through the upset, and is scored. */
export async function step(
  file: string,
  options: StepOptions,
  console: Console,
  terminal: Terminal = { input: process.stdin, output: process.stdout },
): Promise<number> {
  const began = performance.now();
  const folder = outputFolder(file, 'rehearse', options.out);
  const read = openScenario(file);
  const driver = refusing(read, () => new Driver(file, read.scenario, terminal.output, options.speed));
  await driver.drive(terminal);
  const text = driver.replay(folder);
  const scenario = driver.scenario;
  let result: ReturnType<typeof rehearse>;
  try {
    result = rehearse(scenario, usual, (share) => console.progress(share, 'scoring'));
  } catch (e) {
    throw known(read, e);
  }
  console.clear();
  makeFolder(folder);
  write(folder, 'exercise.yaml', text);
  const seconds = (performance.now() - began) / 1e3;
  writeJson(folder, 'summary.json', rehearseSummary(result, { file, version: version(), seconds }));
  const made = ['exercise.yaml', 'summary.json'];
  const score = scoreOf(result, driver.name);
  console.say(score ? scoreLines(result, score) : ['No move was made: nothing to score.']);
  if (options.pictures) {
    const { rehearsePictures } = await import('../../report/pictures/index.ts');
    const drawn = await draw(rehearsePictures({ result, map: null }, Number(options.scale)), folder, console);
    made.push(...drawn.map((d) => d.name));
  }
  console.say([
    '',
    `Written to ${folder}: ${made.join(', ')}`,
    `Replay it: upsettle rehearse ${folder}/exercise.yaml`,
  ]);
  return exits.done;
}

/** The exercise from the first line to the last: the clock, what is typed, and what is shown. */
class Driver {
  readonly name: string;
  scenario: Scenario;
  readonly #file: string;
  readonly #text: string;
  readonly #output: Writable;
  readonly #changeable: readonly string[];
  #exercise: Exercise;
  #moves: TypedMove[] = [];
  #speed: number;
  #running = true;

  constructor(file: string, scenario: Scenario, output: Writable, speed: number) {
    this.#file = file;
    this.#text = readFileSync(file, 'utf8');
    this.#output = output;
    this.#speed = speed;
    this.scenario = scenario;
    this.name = exerciseName((scenario.rehearsing?.answers ?? []).map((a) => a.name));
    this.#exercise = new Exercise(scenario, this.name);
    this.#changeable = changeablePaths(this.#text);
  }

  /** Until `end`, the last line, or the horizon. */
  async drive({ input, output }: Terminal): Promise<void> {
    const live = input.isTTY === true;
    this.#say([
      `EXERCISE  ${upsetWords({ ground: this.#exercise.ground }).join('; ')}`,
      ...exerciseHelp,
      ...viewLines(this.#exercise.view(), true),
    ]);
    const lines = createInterface({ input, ...(live ? { output, prompt: '> ' } : {}), terminal: live });
    const timer = live
      ? setInterval(() => {
          if (!this.#running || this.#exercise.over) return;
          this.#exercise.advance(this.#exercise.time + Math.round((this.#speed * TICK) / 1e3));
          cursorTo(output as NodeJS.WriteStream, 0);
          clearLine(output as NodeJS.WriteStream, 0);
          this.#say(viewLines(this.#exercise.view(), false));
          lines.prompt(true);
          if (this.#exercise.over) lines.close();
        }, TICK)
      : null;
    // An interrupt ends the exercise; what was driven until then is scored.
    lines.on('SIGINT', () => lines.close());
    if (live) lines.prompt();
    for await (const line of lines) {
      if (this.#hear(line.trim()) || this.#exercise.over) break;
      if (live) lines.prompt();
    }
    if (timer) clearInterval(timer);
    lines.close();
  }

  /** The scenario with the exercise as an answer, for a folder in which it is to be found. */
  replay(folder: string): string {
    const folders = { from: resolve(dirname(this.#file)), to: resolve(folder) };
    return withExercise(this.#text, this.name, this.#moves, folders);
  }

  #say(lines: readonly string[]): void {
    this.#output.write(`${lines.join('\n')}\n`);
  }

  /** Returns whether that was the last line. */
  #hear(line: string): boolean {
    if (line === '' || line.startsWith('#')) return false;
    if (line === 'end') return true;
    if (line === 'help') this.#say(exerciseHelp);
    else if (line === 'show') this.#say(viewLines(this.#exercise.view(), true));
    else if (line === 'pause' || line === 'go') this.#running = line === 'go';
    else if (/^speed\b/.test(line)) this.#setSpeed(line.slice(5).trim());
    else if (!this.#wait(line)) this.#move(line);
    return false;
  }

  #setSpeed(text: string): void {
    const speed = Number(text);
    if (speed >= 1 && speed <= 100_000) this.#speed = speed;
    else this.#say([`a speed is a number from 1 to 100000, got '${text}'`]);
  }

  #wait(line: string): boolean {
    const q = quantity(line.replace(/^wait\s+/, ''), 'a time');
    if ('wrong' in q) {
      if (!/^wait\b/.test(line)) return false;
      this.#say([`wait how long? ${q.wrong}`]);
      return true;
    }
    if (q.value < 0) this.#say(['time goes forward only']);
    else this.#exercise.advance(this.#exercise.time + Math.round(q.value));
    this.#say(viewLines(this.#exercise.view(), false));
    return true;
  }

  /** Whole seconds, so that the text of the replay holds the time exactly. */
  #move(line: string): void {
    const time = Math.round(this.#exercise.time);
    const move = typedMove(line, time, this.#changeable);
    if ('wrong' in move) {
      this.#say([move.wrong]);
      return;
    }
    const moves = [...this.#moves, move];
    try {
      const text = withExercise(this.#text, this.name, moves);
      const { scenario } = readScenario(text, { file: this.#file, folder: dirname(this.#file) });
      const exercise = new Exercise(scenario, this.name);
      exercise.advance(time);
      exercise.view();
      this.scenario = scenario;
      this.#exercise = exercise;
      this.#moves = moves;
      this.#say([
        `done at ${time - exercise.ground.first >= 0 ? 'upset +' : 'upset'} ${Math.round((time - exercise.ground.first) / 60)} min: ${line}`,
      ]);
    } catch (e) {
      if (!(e instanceof ScenarioError)) throw e;
      this.#say(e.located.map((l) => l.message));
    }
  }
}
