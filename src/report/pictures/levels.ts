import type { RunResult } from '../../study/result.ts';
import { clock, figure, shown } from '../figures.ts';
import { startWords } from '../screen.ts';
import { packed, upsetWords, WIDEST } from './heading.ts';
import { type Panel, type PanelLine, panelSheet } from './panels.ts';
import type { Picture } from './picture.ts';
import { short } from './style.ts';
import { timeUnit } from './time-axis.ts';

const MOST_LINES = 6;
const MOST_EVENTS = 4;

/** Levels, interfaces and bands of the settlers, mixers while they fill, and what tanks hold. */
export const levels: Picture<RunResult> = {
  name: () => 'levels.png',
  parts: (r) => (panelsOf(r).length > 0 ? [{ train: '', solute: '' }] : []),
  config(r) {
    const s = r.plant.scenario;
    const unit = timeUnit(s.horizon);
    // Each kind once, the latest first: start-up has many events, and those at the end tell how the plant stands.
    const kinds = new Map(r.events.map((e) => [e.message, e]));
    const told = [...kinds.values()].sort((a, b) => b.time - a.time).slice(0, MOST_EVENTS);
    const more = r.events.length - told.length;
    const events = [
      ...told.reverse().map((e) => `${clock(e.time)}: ${e.message}`),
      ...(more > 0 ? [`${more} more in summary.json`] : []),
    ];
    return panelSheet({
      title: `${r.complete ? '' : 'INCOMPLETE: '}${short(s.title, 60)}: levels and bands`,
      answer: [
        ...(events.length > 0
          ? packed(events)
          : ['No event: no settler flooded, no interface was lost, no tank ran empty or over.']),
        ...packed(upsetWords(r.shades, unit)).slice(0, 2),
      ].map((l) => short(l, WIDEST)),
      source: `${short(s.title, 60)}: levels over ${figure(s.horizon / unit.seconds)} ${unit.name}, start ${startWords(s)}`,
      span: s.horizon,
      panels: panelsOf(r),
      shades: r.shades,
    });
  },
};

function panelsOf(r: RunResult): Panel[] {
  const tanks = new Set(r.plant.scenario.tanks.map((t) => t.name));
  const { outputs } = r.plant.system;
  const moves = (i: number): boolean =>
    r.records.rows.some((row) => Math.abs(row[i] - r.records.rows[0][i]) > 1e-9 * outputs[i].scale);
  const lines = (pick: (path: string) => boolean): PanelLine[] =>
    outputs.flatMap((o, i) => (pick(o.path) && moves(i) ? [line(r, i)] : [])).slice(0, MOST_LINES);
  const panel = (title: string, unit: string, weight: number, list: readonly PanelLine[]): Panel[] =>
    list.length === 0 ? [] : [{ title, unit, weight, lines: list, limits: [], from: 0 }];
  return [
    ...panel(
      'interface',
      'm',
      2,
      lines((p) => p.endsWith('.settler.interface')),
    ),
    ...panel(
      'band',
      'm',
      1,
      lines((p) => p.endsWith('.settler.band')),
    ),
    ...panel(
      'O share',
      '-',
      1,
      lines((p) => p.endsWith('.mixer.organic_share')),
    ),
    ...panel(
      'tanks',
      'm^3',
      1,
      lines((p) => tanks.has(p.replace(/\.(volume|bottoms)$/, ''))),
    ),
  ];
}

function line(r: RunResult, output: number): PanelLine {
  const { path, unit } = r.plant.system.outputs[output];
  const { factor } = shown(unit);
  const label = path.replace(/\.(settler|mixer)\./, ' ').replace('_', ' ');
  return { label, data: r.records.times.map((x, k) => ({ x, y: r.records.rows[k][output] * factor })) };
}
