import type { Sheet } from '../pictures/panels.ts';
import { lineStyle } from '../pictures/style.ts';
import { timeUnit } from '../pictures/time-axis.ts';

/** A sheet of panels as plain data for the page: times in its unit, every line with its colour and dash. */
export interface PageSheet {
  readonly name: string;
  readonly title: string;
  readonly answer: readonly string[];
  readonly axis: string;
  readonly unit: string;
  readonly begin: number;
  readonly end: number;
  readonly shades: readonly { readonly from: number; readonly to: number; readonly words: string }[];
  readonly panels: readonly {
    readonly title: string;
    readonly unit: string;
    readonly weight: number;
    readonly limits: readonly { readonly value: number; readonly label: string; readonly from: number }[];
    readonly lines: readonly {
      readonly label: string;
      readonly colour: string;
      readonly dash: readonly number[];
      readonly marks: boolean;
      readonly x: readonly number[];
      readonly y: readonly (number | null)[];
    }[];
  }[];
}

/** Points of a line that a screen can show; of more, the least and the greatest of each piece are kept. */
const MOST = 700;

export function pageSheet(name: string, sheet: Sheet): PageSheet {
  const unit = timeUnit(sheet.span);
  const inUnit = (s: number): number => digits(s / unit.seconds);
  let style = 0;
  // One and the same series looks alike in all panels, and is switched on and off in all of them.
  const known = new Map<string, ReturnType<typeof lineStyle>>();
  return {
    name,
    title: sheet.title,
    answer: sheet.answer,
    axis: sheet.axis ?? 'time',
    unit: unit.name,
    begin: inUnit(sheet.begin ?? 0),
    end: inUnit(sheet.span),
    shades: sheet.shades.map((s) => ({ from: inUnit(s.from), to: inUnit(s.to), words: s.words })),
    panels: sheet.panels.map((p) => ({
      title: p.heading ?? p.title,
      unit: p.unit,
      weight: p.weight,
      limits: p.limits.map((l) => ({ ...l, from: inUnit(l.from) })),
      lines: p.lines.map((l) => {
        const own = known.get(l.label) ?? lineStyle(l.marks ? style - 1 : (l.style ?? style++));
        known.set(l.label, own);
        const data = l.marks ? l.data : thinned(l.data);
        return {
          label: l.label,
          colour: own.borderColor,
          dash: own.borderDash,
          marks: l.marks === true,
          x: data.map((q) => inUnit(q.x)),
          y: data.map((q) => (Number.isFinite(q.y) ? digits(q.y) : null)),
        };
      }),
    })),
  };
}

interface Point {
  readonly x: number;
  readonly y: number;
}

function thinned(data: readonly Point[]): readonly Point[] {
  if (data.length <= MOST) return data;
  const size = Math.ceil((2 * data.length) / MOST);
  const kept: Point[] = [data[0]];
  for (let i = 0; i < data.length; i += size) {
    const piece = data.slice(i, i + size);
    const low = piece.reduce((a, b) => (b.y < a.y ? b : a));
    const high = piece.reduce((a, b) => (b.y > a.y ? b : a));
    kept.push(...(low === high ? [low] : low.x < high.x ? [low, high] : [high, low]));
  }
  kept.push(data[data.length - 1]);
  return kept;
}

/** Six digits: more than a screen shows, less than half of the room. */
export const digits = (v: number): number => Number(v.toPrecision(6));
