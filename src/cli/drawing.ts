import type { Drawn } from '../report/pictures/index.ts';
import type { Stop } from '../solve/outcome.ts';
import type { Console } from './console.ts';
import { exits } from './exit.ts';
import { write } from './files.ts';

/** Draws pictures and writes them one by one until it is told to stop. Returns what was drawn. */
export async function draw(
  pictures: AsyncIterable<Drawn>,
  folder: string,
  console: Console,
  stopped: () => boolean = () => false,
): Promise<Drawn[]> {
  const made: Drawn[] = [];
  for await (const picture of pictures) {
    if (stopped()) break;
    console.progress(0, `drawing ${picture.name}`);
    write(folder, picture.name, picture.png);
    made.push(picture);
  }
  console.clear();
  return made;
}

/** How a verb ends that followed the plant: interrupted, incomplete with the reason, or done. */
export async function ending(folder: string, interrupted: boolean, stop: Stop): Promise<number> {
  if (interrupted) {
    process.stderr.write(`interrupted; what was finished is in ${folder}\n`);
    return exits.interrupted;
  }
  if (stop.reason === 'reached-end') return exits.done;
  const { explain } = await import('../solve/outcome.ts');
  process.stderr.write(`incomplete: ${explain(stop)}\n`);
  return exits.incomplete;
}
