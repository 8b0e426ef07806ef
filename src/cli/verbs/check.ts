import { checkScreen } from '../../report/check-screen.ts';
import { check as look } from '../../study/check/check.ts';
import type { Console } from '../console.ts';
import { exits } from '../exit.ts';
import { openScenario } from '../files.ts';
import { refusing } from '../refusing.ts';

/** `upsettle check FILE`: the plant as understood and at rest, or every complaint. */
export function check(file: string, console: Console): number {
  const read = openScenario(file);
  console.say(checkScreen(refusing(read, () => look(read.scenario))));
  return exits.done;
}
