import type { Answer, Begin, End, Step } from '../../scenario/rehearsing.ts';
import type { Change } from '../../scenario/scenario.ts';
import type { Upset } from './ground.ts';

/** How an answer is varied: as written where nothing is said. */
export interface Variant {
  /** s at which its first step begins. */
  readonly start?: number;
  /** s at which all of its moves begin to be taken back; Infinity: never. */
  readonly end?: number;
  /** Factor on every `by`. */
  readonly size?: number;
}

/** An answer with its times settled. */
export interface Plan {
  /** Moves at times of the run. */
  readonly moves: readonly Change[];
  /** s by step; null: its condition was never met, and it was not carried out. */
  readonly starts: readonly (number | null)[];
}

/** s at which a condition is met, given what has been done so far; null: never. */
export type Trigger = (
  begin: Extract<Begin, { when: unknown }>,
  moves: readonly Change[],
  from: number,
) => number | null;

/**
 * Settles when each step begins. The course before a step acts is that of what was done before it, so a condition is
 * looked up in that run, step by step; one operator begins a step when the last move of the step before has been made
 * and the time between has passed. A start that is given moves the answer as a whole: unconditional steps keep their
 * distances from the first.
 */
export function plan(
  answer: Answer,
  upsets: readonly Upset[],
  horizon: number,
  trigger: Trigger,
  variant: Variant = {},
): Plan {
  const first = upsets[0]?.begins ?? 0;
  const written = (begin: Begin): number | null => {
    if ('when' in begin) return null;
    return Math.max(0, 'at' in begin ? begin.at : (upsets[begin.upset - 1]?.begins ?? first) + begin.after);
  };
  const asWritten = answer.steps[0] ? written(answer.steps[0].begins) : null;
  const shift = variant.start === undefined || asWritten === null ? 0 : variant.start - asWritten;
  const starts: (number | null)[] = [];
  let moves: Change[] = [];
  let free = Number.NEGATIVE_INFINITY;
  answer.steps.forEach((step, k) => {
    const { begins } = step;
    const fixed = written(begins);
    const wished =
      k === 0 && variant.start !== undefined
        ? variant.start
        : fixed !== null
          ? fixed + shift
          : trigger(begins as Extract<Begin, { when: unknown }>, moves, Math.max(first, free));
    if (wished === null) {
      starts.push(null);
      return;
    }
    const start = Math.max(wished, free);
    starts.push(start);
    if (start >= horizon) return;
    const end = variant.end ?? endOf(step.ends, start, upsets);
    moves = [...moves, ...step.moves.flatMap((m) => placed(m, start, end, variant.size ?? 1))];
    free = start + Math.max(0, ...step.moves.map((m) => m.at)) + answer.between;
  });
  return { moves, starts };
}

/** s at which the moves of a step begin to be taken back. */
export function endOf(end: End | null, start: number, upsets: readonly Upset[]): number {
  if (end === null) return Number.POSITIVE_INFINITY;
  if ('afterStart' in end) return start + end.afterStart;
  const upset = upsets[end.upset - 1];
  if (upset === undefined) return Number.POSITIVE_INFINITY;
  if ('afterUpset' in end) return upset.begins + end.afterUpset;
  return upset.ends === null ? Number.POSITIVE_INFINITY : upset.ends + end.afterUpsetEnds;
}

function placed(move: Change, start: number, end: number, size: number): Change[] {
  const at = start + move.at;
  if (end <= at) return [];
  const lasts = Math.min(move.lasts ?? Number.POSITIVE_INFINITY, end - at);
  const { how } = move;
  return [
    {
      ...move,
      at,
      lasts: Number.isFinite(lasts) ? lasts : null,
      how:
        'by' in how
          ? { ...how, by: how.by * size }
          : 'follow' in how
            ? { follow: { times: how.follow.times.map((t) => t + start), values: how.follow.values } }
            : how,
    },
  ];
}

/** Whether a size means anything: some move adds or takes. */
export const isScalable = (answer: Answer): boolean =>
  answer.steps.some((s: Step) => s.moves.some((m) => 'by' in m.how));
