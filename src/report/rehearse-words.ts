import type { Answer } from '../scenario/rehearsing.ts';
import type { Change, Limit } from '../scenario/scenario.ts';
import type { RehearseResult } from '../study/rehearse/rehearse.ts';
import { clock, figure, shown, withUnit } from './figures.ts';

/** A limit as people say it: `raffinate.copper < 0.600 g/L`. */
export const limitWords = (l: Limit, unit: string): string =>
  `${l.stream}.${l.quantity} ${l.side === 'below' ? '<' : '>'} ${withUnit(l.value, unit)}`;

/** A change with its ramp and its length: `leach liquor.copper +35 % over 30 min for 4 h`. */
export function changeWords(c: Change): string {
  const over = c.over > 0 ? ` over ${clock(c.over)}` : '';
  const lasts = c.lasts === null ? '' : ` for ${clock(c.lasts)}`;
  return `${c.words}${over}${lasts}`;
}

/** The upsets in words, each once. */
export const upsetWords = (r: Pick<RehearseResult, 'ground'>): string[] =>
  r.ground.changes
    .filter((c, i, all) => all.findIndex((o) => o.words === c.words && o.at === c.at) === i)
    .map(changeWords);

/** Day and hour by the plant's clock, or nothing where it does not state one. */
export function clockTime(r: Pick<RehearseResult, 'scenario'>, t: number): string {
  const zero = r.scenario.rehearsing?.timeZero ?? null;
  if (zero === null) return '';
  return new Date(Math.round((zero + 1e3 * t) / 60e3) * 60e3).toISOString().slice(0, 16).replace('T', ' ');
}

/** The hour by the plant's clock, with the day where it is another than that of the upset. */
export function hourOf(r: Pick<RehearseResult, 'scenario' | 'ground'>, t: number): string {
  const at = clockTime(r, t);
  return at.slice(0, 10) === clockTime(r, r.ground.first).slice(0, 10) ? at.slice(11) : at.slice(5);
}

/** A time of the run as time since the upset began, with the plant's clock beside it where that is stated. */
export function since(r: Pick<RehearseResult, 'scenario' | 'ground'>, t: number): string {
  const at = hourOf(r, t);
  const words = clock(t - r.ground.first);
  return at === '' ? words : `${words} (${at})`;
}

/** What an answer does, at a size: `organic tank.flow +10.3 %`. */
export function sizeWords(answer: Answer, factor: number, of: RehearseResult['plant']): string {
  const sized = answer.steps.flatMap((s) => s.moves).filter((m) => 'by' in m.how);
  const [move] = sized;
  if (!move || !('by' in move.how)) return '';
  if (sized.length > 1) return `${figure(100 * factor)} % of it`;
  const { by, relative } = move.how;
  const sign = by * factor < 0 ? '-' : '+';
  const size = Math.abs(by * factor);
  if (relative) return `${sign}${figure(100 * size)} %`;
  const unit = of.system.inputs.find((i) => i.path === move.quantity)?.unit ?? '';
  const { unit: text, factor: scale } = shown(unit);
  return `${sign}${figure(size * scale)} ${text}`;
}

/** The moves of an answer in words. */
export const movesWords = (answer: Answer): string =>
  answer.steps.map((s) => s.moves.map(changeWords).join(', ')).join(', then ');
