import type { Score, View } from '../study/rehearse/exercise.ts';
import type { RehearseResult } from '../study/rehearse/rehearse.ts';
import { clock, columns, figure, shown, withUnit } from './figures.ts';

export const exerciseHelp: readonly string[] = [
  '  organic tank.flow +10 %   a move: any quantity that an upset can change, with a change or to a value;',
  "                            'over 10 min' ramps it, 'for 2 h' takes it back; 'put AIC-101 in manual'",
  '                            after it takes a flow out of the hands of the loop that moves it',
  '  wait 20 min, or 20 min    let the plant run so long at once',
  '  pause, go, speed 120      stop and start the clock; seconds of the plant in one of yours',
  '  show, help, end           all figures; these lines; finish and score (the rest is run without a move)',
];

/** What is seen at a moment; all of it, or in one line. */
export function viewLines(v: View, whole: boolean): string[] {
  const events = v.events.map((e) => `!  ${clock(e.time)} of the run: ${e.message}`);
  const when = v.sinceUpset < 0 ? `upset in ${clock(-v.sinceUpset)}` : `upset + ${clock(v.sinceUpset)}`;
  const limitOf = (q: View['shown'][number]): string =>
    q.limit === null
      ? ''
      : `${q.limit.side === 'below' ? '<' : '>'} ${withUnit(q.limit.value, q.unit)}${isOver(q) ? '  BROKEN' : ''}`;
  if (!whole) {
    const few = v.shown
      .filter((q) => q.limit !== null)
      .map((q) => `${q.path} ${withUnit(q.value, q.unit)} (${limitOf(q)})`);
    return [...events, `${when}  ${few.join(', ')}`];
  }
  return [
    ...events,
    `${when}, ${clock(v.time)} of the run`,
    ...columns(
      v.shown.map((q) => [q.path, figure(q.value * shown(q.unit).factor), shown(q.unit).unit, limitOf(q)]),
    ),
  ];
}

const isOver = (q: View['shown'][number]): boolean =>
  q.limit !== null && (q.limit.side === 'below' ? q.value > q.limit.value : q.value < q.limit.value);

/** Nothing, the best named answer, and the exercise, side by side. */
export function scoreLines(r: RehearseResult, score: Score): string[] {
  const main = r.nothing.limits[r.chief];
  const row = (name: string, f: RehearseResult['nothing']): string[] => [
    name,
    withUnit(f.limits[r.chief].worst.value, main.unit),
    f.outside > 0 ? clock(f.outside) : 'none',
    `${figure(f.beyond)} kg`,
    `${figure(f.extraSolvent)} m^3`,
    ...(f.cost === null ? [] : [figure(f.cost)]),
  ];
  const currency = r.scenario.commissioning?.prices?.currency ?? '';
  const counted = {
    cost: 'cost',
    beyond: `${main.limit.quantity} above the limit`,
    outside: 'time over the limit',
  }[score.by];
  return [
    `SCORE  ${score.yours.kept ? 'all limits kept' : `a limit was broken for ${clock(score.yours.outside)}`}`,
    ...columns([
      ['', 'worst', 'over', 'above', 'extra organic', ...(r.nothing.cost === null ? [] : [currency])],
      row('nothing', r.nothing),
      ...(score.best ? [row(`best named: ${score.best.name}`, score.best.figures)] : []),
      row('yours', score.yours),
    ]),
    ...(score.avoided === null
      ? []
      : [
          `You avoided ${figure(100 * score.avoided)} % of the ${counted} that the best named answer avoids.`,
        ]),
  ];
}
