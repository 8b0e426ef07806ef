import type { RunResult } from '../../study/result.ts';
import { figure, shown, withUnit } from '../figures.ts';
import { limitLines, startWords } from '../screen.ts';
import { packed, upsetWords, WIDEST } from './heading.ts';
import { type Panel, type PanelLine, panelSheet } from './panels.ts';
import type { Picture } from './picture.ts';
import { short } from './style.ts';
import { timeUnit } from './time-axis.ts';

/** Curves whose largest values differ by more than this share no panel. */
const COMPARABLE = 4;
const MOST_PANELS = 5;

/** Outlets against their limits over time, with the upsets shaded and what was changed at the foot. */
export const outlets: Picture<RunResult> = {
  name: () => 'outlets.png',
  config(r) {
    const s = r.plant.scenario;
    const unit = timeUnit(s.horizon);
    const limited = [...new Set(r.limits.map((l) => l.path))];
    const panels = [...limitPanels(r, limited), ...otherPanels(r, limited)];
    const changed = changedPanels(r);
    const upsets = upsetWords(r.shades, unit);
    const answer = [
      ...r.limits.slice(0, 2).flatMap((l) => packed(limitLines(l).map((q) => q.replace(/\s+/g, ' ').trim()))),
      ...packed(upsets).slice(0, 3),
    ];
    return panelSheet({
      title: r.complete ? s.title : `INCOMPLETE: ${s.title}`,
      answer: answer.map((l) => short(l, WIDEST)),
      source: `${short(s.title, 60)}: outlets over ${figure(s.horizon / unit.seconds)} ${unit.name}, start ${startWords(s)}`,
      span: s.horizon,
      panels: [...panels.slice(0, MOST_PANELS - Math.min(2, changed.length)), ...changed.slice(0, 2)],
      shades: r.shades,
    });
  },
};

function line(r: RunResult, path: string): PanelLine & { largest: number; unit: string } {
  const output = r.plant.system.outputs.findIndex((o) => o.path === path);
  const { unit, factor } = shown(r.plant.system.outputs[output].unit);
  let largest = 0;
  const data = r.records.times.map((x, k) => {
    const y = r.records.rows[k][output] * factor;
    if (Math.abs(y) > largest) largest = Math.abs(y);
    return { x, y };
  });
  // Records may stride over the worst moment, which the text names.
  for (const l of r.limits)
    if (l.path === path && !Number.isNaN(l.worst.value)) {
      const at = data.findIndex((p) => p.x > l.worst.time);
      data.splice(at < 0 ? data.length : at, 0, { x: l.worst.time, y: l.worst.value * factor });
      largest = Math.max(largest, Math.abs(l.worst.value * factor));
    }
  return { label: path, data, largest, unit };
}

/** The lines name their streams in the legend; the axis says what they show. */
function quantityOf(path: string): string {
  if (path.includes(' / ')) return 'ratio';
  return path.slice(path.lastIndexOf('.') + 1).replace(/^removal of .*/, 'removal');
}

function limitPanels(r: RunResult, limited: readonly string[]): Panel[] {
  return limited.slice(0, 3).map((path) => {
    const own = r.limits.filter((l) => l.path === path);
    const l = line(r, path);
    return {
      title: quantityOf(path),
      unit: l.unit,
      weight: 2,
      lines: [l],
      // A purity comes from zero in start-up: that must not flatten what its limits are about.
      from: l.unit === '%' ? Math.min(...own.map((q) => q.limit.from)) : 0,
      limits: own.map((q) => ({
        value: q.limit.value * shown(q.unit).factor,
        from: q.limit.from,
        label: `limit ${q.limit.side === 'below' ? '<' : '>'} ${withUnit(q.limit.value, q.unit)}`,
      })),
    };
  });
}

/**
 * Solutes in outlets, tanks and batches, and with one solute also in streams between trains; those of like size
 * together. Several solutes in every stream would bury the outlets.
 */
function otherPanels(r: RunResult, limited: readonly string[]): Panel[] {
  const { scenario: s, network } = r.plant;
  const streams = s.solutes.length > 1 ? network.outlets : [...network.streams.values()];
  // What a stream divides into has its composition.
  const own = streams.filter((q) => !['feed', 'tank', 'split'].includes(q.maker.kind));
  const divided = s.splits.flatMap((q) =>
    network.streams.get(q.stream)?.maker.kind === 'feed'
      ? []
      : [...q.branches.map((b) => b.name), q.rest]
          .filter((n) => network.streams.get(n)?.user === null)
          .slice(0, 1),
  );
  const made = [...own.map((q) => q.name), ...(s.solutes.length > 1 ? divided : [])];
  const names = [
    ...made,
    ...s.tanks.map((t) => t.name),
    ...s.batches.flatMap((b) => [`${b.name} aqueous`, `${b.name} organic`]),
  ];
  const lines = s.solutes
    .flatMap((solute) => names.map((n) => `${n}.${solute}`))
    .filter((p) => !limited.includes(p))
    .map((p) => line(r, p))
    .sort((a, b) => b.largest - a.largest);
  const groups: (typeof lines)[] = [];
  for (const l of lines) {
    const group = groups[groups.length - 1];
    if (group && group[0].largest <= COMPARABLE * l.largest) group.push(l);
    else groups.push([l]);
  }
  return groups.slice(0, 3).map((g) => {
    const shown = g.slice(0, 4);
    return {
      title: [...new Set(shown.map((l) => quantityOf(l.label)))].join(', '),
      unit: g[0].unit,
      weight: 1,
      lines: shown,
      limits: [],
      from: 0,
    };
  });
}

/** The inputs that upsets changed, as they were: a reader sees cause and effect on one sheet. */
function changedPanels(r: RunResult): Panel[] {
  const lines = r.courses
    .filter((c) => c.unit !== '')
    .map((c) => {
      const { unit, factor } = shown(c.unit);
      const data = c.times.map((x, k) => ({ x, y: c.values[k] * factor }));
      return {
        label: c.quantity,
        data,
        unit,
        largest: data.reduce((m, p) => Math.max(m, p.y), Number.NEGATIVE_INFINITY),
      };
    });
  const first = lines[0];
  if (!first) return [];
  const like = (a: number, b: number): boolean => a <= COMPARABLE * b && b <= COMPARABLE * a;
  const groups = [...new Set(lines.map((l) => l.unit))].map((unit) => {
    const own = lines.filter((l) => l.unit === unit);
    return own.filter((l) => like(l.largest, own[0].largest)).slice(0, 3);
  });
  return groups.map((g) => ({
    title: quantityOf(g[0].label),
    unit: g[0].unit,
    weight: 1,
    lines: g,
    limits: [],
    from: 0,
  }));
}
