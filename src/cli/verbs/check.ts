import { checkScreen } from '../../report/check-screen.ts';
import { controlled } from '../../study/control/joined.ts';
import { restoreState } from '../../study/saved.ts';
import type { Console } from '../console.ts';
import { exits } from '../exit.ts';
import { openScenario } from '../files.ts';
import { refusing } from '../refusing.ts';

/** `upsettle check FILE`: the plant as understood, or every complaint. */
export function check(file: string, console: Console): number {
  const read = openScenario(file);
  const plant = refusing(read, () => {
    const made = controlled(read.scenario).plant;
    if (typeof read.scenario.start === 'object') restoreState(made, read.scenario.start);
    return made;
  });
  console.say(checkScreen(plant));
  return exits.done;
}
