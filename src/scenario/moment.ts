import { hint } from './nearest.ts';
import type { Begin, Condition, End, Instrument } from './rehearsing.ts';
import { show } from './show.ts';
import { quantity } from './units.ts';

/** Something that a text stands for, or what is wrong with the text. */
type Read<T> = { readonly is: T } | { readonly wrong: string };

/** Upsets by number, as texts refer to them, and what can be measured. */
export interface Frame {
  readonly upsets: number;
  readonly instruments: readonly Instrument[];
  readonly quantities: readonly string[];
  /** Reads a value of a quantity in its unit. */
  readonly value: (text: string, path: string) => Read<number>;
}

const START = "expected a start such as '40 min after upset'";
const END = "expected an end such as '4 h after start' or '30 min after upset ends'";
const WHEN = "expected a condition such as 'AT-101 above 0.80 g/L, then after 5 min'";

/** `40 min after upset`, `10 min before upset 2`, `after upset`, or a time of the run such as `17 h`. */
export function readBegin(text: string | number, frame: Frame): Read<Begin> {
  const found = /^(.*?)\s*\b(after|before) upset(?:\s+(\d+))?$/.exec(String(text).trim());
  if (!found) {
    const q = quantity(text, 'a time');
    if ('wrong' in q) return { wrong: `${START}, got ${show(text)}` };
    return q.value >= 0 ? { is: { at: q.value } } : { wrong: `must not be negative, got ${show(text)}` };
  }
  const [, time, side, number = '1'] = found;
  const q = time === '' ? { value: 0 } : quantity(time, 'a time');
  if ('wrong' in q || q.value < 0) return { wrong: `${START}, got ${show(text)}` };
  const upset = Number(number);
  const wrong = wrongUpset(upset, frame);
  return wrong === null ? { is: { after: side === 'after' ? q.value : -q.value, upset } } : { wrong };
}

/** `4 h after start`, `6 h after upset`, `30 min after upset ends`. */
export function readEnd(text: string, frame: Frame): Read<End> {
  const found = /^(.*?)\s*\bafter (start|upset(?:\s+(\d+))?( ends)?)$/.exec(text.trim());
  const q = found?.[1] === '' ? { value: 0 } : quantity(found?.[1], 'a time');
  if (!found || 'wrong' in q || q.value < 0) return { wrong: `${END}, got ${show(text)}` };
  const [, , what, number = '1', ends] = found;
  if (what === 'start')
    return q.value > 0 ? { is: { afterStart: q.value } } : { wrong: 'an answer must last longer than 0 s' };
  const upset = Number(number);
  const wrong = wrongUpset(upset, frame);
  if (wrong !== null) return { wrong };
  return { is: ends === undefined ? { afterUpset: q.value, upset } : { afterUpsetEnds: q.value, upset } };
}

function wrongUpset(upset: number, { upsets }: Frame): string | null {
  if (upsets === 0) return 'there is no upset to count from; state a time of the run';
  return upset >= 1 && upset <= upsets ? null : `there is no upset ${upset}: the scenario has ${upsets}`;
}

/** `AT-101 above 0.80 g/L, then after 5 min`; an instrument by its name, or a quantity itself. */
export function readWhen(text: string, frame: Frame): Read<Extract<Begin, { when: Condition }>> {
  const found = /^(.+?)\s+(above|below)\s+(.+?)(?:,\s*then after\s+(.+))?$/.exec(text.trim());
  if (!found) return { wrong: `${WHEN}, got ${show(text)}` };
  const [, name, side, value, then] = found;
  const instrument = frame.instruments.findIndex((q) => q.name === name);
  if (instrument < 0 && !frame.quantities.includes(name)) {
    const known = [...frame.instruments.map((q) => q.name), ...frame.quantities];
    return { wrong: `unknown analyser or quantity ${show(name)}${hint(name, known)}` };
  }
  const path = instrument < 0 ? name : frame.instruments[instrument].quantity;
  const level = frame.value(value, path);
  if ('wrong' in level) return level;
  const after = then === undefined ? { value: 0 } : quantity(then, 'a time');
  if ('wrong' in after) return { wrong: after.wrong };
  if (after.value < 0) return { wrong: `must not be negative, got ${show(then)}` };
  return {
    is: {
      when: {
        instrument: instrument < 0 ? null : instrument,
        quantity: path,
        side: side as 'above' | 'below',
        value: level.is,
        words: `${name} ${side} ${value}`,
      },
      after: after.value,
    },
  };
}

/** A stretch of time in the units in which plants state it. */
export function clockWords(seconds: number): string {
  const minutes = Math.round(seconds / 60);
  if (minutes === 0) return `${Math.round(seconds)} s`;
  const [h, m] = [Math.floor(minutes / 60), minutes % 60];
  return h === 0 ? `${m} min` : m === 0 ? `${h} h` : `${h} h ${m} min`;
}

const CLOCK = /^(\d{4}-\d{2}-\d{2})[T ](\d{2}:\d{2}(?::\d{2})?)$/;

/** `2026-03-01 06:00` in ms, as if its zone were UTC: only differences count. Null where it is no such time. */
export function readClock(text: string): number | null {
  const [, day, time] = CLOCK.exec(text.trim()) ?? [];
  const ms = Date.parse(`${day}T${time}Z`);
  return Number.isFinite(ms) && new Date(ms).toISOString().startsWith(String(day)) ? ms : null;
}
