import type { Begin, End, Instrument, Step } from '../scenario/rehearsing.ts';
import type { Scenario } from '../scenario/scenario.ts';
import { clock, figure } from './figures.ts';

/** What a scenario states for `rehearse`, as understood; nothing where it states nothing. */
export function rehearsingLines(s: Scenario): string[] {
  const r = s.rehearsing;
  if (!r) return [];
  const lines = [
    ...r.instruments.map(instrumentWords),
    ...r.answers.map(
      (a) =>
        `  ${a.name}: ${a.steps.map(stepWords).join(`; then${a.between > 0 ? `, ${clock(a.between)} later` : ''}, `)}`,
    ),
    ...r.variations.map((v) => `  ${v.words}`),
  ];
  return lines.length > 0 ? ['', 'Rehearsal', ...lines] : [];
}

function instrumentWords(q: Instrument): string {
  const noise =
    'share' in q.noise ? `${figure(100 * q.noise.share)} % of reading` : `${figure(q.noise.absolute)} g/L`;
  const warn = q.warn === null ? '' : `, warns at ${figure(q.warn)} g/L`;
  return `  ${q.name} measures ${q.quantity}: a ${q.takes} every ${clock(q.every)}, known ${clock(q.delay)} later, noise ${noise}${warn}`;
}

function stepWords({ begins, moves, ends }: Step): string {
  const what = [...new Set(moves.map((m) => m.words))].join(', ');
  return `${what}, ${beginWords(begins)}${ends === null ? '' : `, taken back ${endWords(ends)}`}`;
}

function beginWords(b: Begin): string {
  if ('when' in b) return `when ${b.when.words}${b.after > 0 ? `, then after ${clock(b.after)}` : ''}`;
  if ('at' in b) return `at ${clock(b.at)}`;
  const of = b.upset > 1 ? `upset ${b.upset}` : 'the upset';
  return `${clock(Math.abs(b.after))} ${b.after < 0 ? 'before' : 'after'} ${of} begins`;
}

function endWords(e: End): string {
  if ('afterStart' in e) return `${clock(e.afterStart)} after its start`;
  if ('afterUpset' in e) return `${clock(e.afterUpset)} after the upset begins`;
  return `${clock(e.afterUpsetEnds)} after the upset ends`;
}
