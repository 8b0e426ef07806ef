import { isAbsolute, join, relative } from 'node:path';
import { isMap, isScalar, parseDocument, visit } from 'yaml';
import { movedModeline } from './editor.ts';
import { hint } from './nearest.ts';
import { outline } from './outline.ts';
import { show } from './show.ts';

/** A move as it was typed: the keys of a move in a scenario, and when it was made, in whole seconds of the run. */
export interface TypedMove {
  readonly time: number;
  readonly change: string;
  readonly to?: string;
  readonly by?: string;
  readonly over?: string;
  readonly for?: string;
  readonly put?: string;
}

/** Paths that moves may change, of a scenario that is sound. */
export const changeablePaths = (text: string): string[] => [
  ...outline(parseDocument(text.normalize('NFC')).toJS()).changeable.keys(),
];

const FORM =
  "expected a move such as 'organic tank.flow +10 %', with 'over 10 min', 'for 2 h' or 'put AIC-101 in manual' after it";

/**
 * A line such as `organic tank.flow +10 % over 10 min for 2 h`, `leach liquor.flow to 380 m^3/h` or
 * `extraction.2.mixer stopped` as a move; what its parts mean is judged by the reader of the scenario.
 */
export function typedMove(
  line: string,
  time: number,
  changeable: readonly string[],
): TypedMove | { readonly wrong: string } {
  const text = line.normalize('NFC').trim().replace(/\s+/g, ' ');
  const change = [...changeable]
    .sort((a, b) => b.length - a.length)
    .find((q) => text === q || text.startsWith(`${q} `));
  if (change === undefined) {
    const [name] = /^[^+\d-]*[^+\d\s-]/.exec(text) ?? [text];
    return { wrong: `unknown quantity ${show(name)}${hint(name, changeable)}; ${FORM}` };
  }
  const [said, ...times] = ` ${text.slice(change.length)}`
    .split(/\s+(?=(?:over|for|put)\s)/)
    .map((p) => p.trim());
  if (said === '') return { wrong: `what is to become of ${change}? ${FORM}` };
  const after = (key: string): string | undefined =>
    times.find((p) => p.startsWith(`${key} `))?.slice(key.length + 1);
  const [over, lasts, put] = [after('over'), after('for'), after('put')];
  const rest = {
    ...(over ? { over } : {}),
    ...(lasts ? { for: lasts } : {}),
    ...(put ? { put } : {}),
  };
  if (/^[+−-]/.test(said)) return { time, change, by: said.replace(/^([+−-])\s+/, '$1'), ...rest };
  return { time, change, to: said.replace(/^to /, ''), ...rest };
}

/** A name for the exercise that no answer has. */
export function exerciseName(taken: readonly string[]): string {
  for (let i = 1; ; i++) {
    const name = i === 1 ? 'exercise' : `exercise ${i}`;
    if (!taken.includes(name)) return name;
  }
}

/**
 * The text of a scenario with the moves of an exercise as one more answer, so that it is rehearsed exactly as it was
 * driven. Comments stay; a start that was left out is written; data files are found from the new folder too.
 */
export function withExercise(
  text: string,
  name: string,
  moves: readonly TypedMove[],
  folders: { readonly from: string; readonly to: string } | null = null,
): string {
  const document = parseDocument(text);
  if (moves.length > 0) {
    const start = moves[0].time;
    const answer = {
      start: `${start} s`,
      moves: moves.map(({ time, ...move }) => ({
        ...(time > start ? { at: `${time - start} s` } : {}),
        ...move,
      })),
    };
    document.setIn(['answers', name], document.createNode(answer));
  }
  if (folders !== null)
    visit(document, {
      Pair(_, pair) {
        const key = isScalar(pair.key) ? pair.key.value : null;
        const value = isScalar(pair.value) ? pair.value : null;
        if ((key !== 'file' && key !== 'saved') || typeof value?.value !== 'string') return;
        if (isMap(pair.value) || isAbsolute(value.value)) return;
        value.value = relative(folders.to, join(folders.from, value.value));
      },
    });
  const written = document.toString({ lineWidth: 0 });
  return folders === null ? written : movedModeline(written, folders.from, folders.to);
}
