import { clock } from '../figures.ts';

/** A moment as a legend names it; the start needs no time. */
export const moment = (q: { label: string; time: number }): string =>
  q.time === 0 ? q.label : `${q.label}, ${clock(q.time)}`;
