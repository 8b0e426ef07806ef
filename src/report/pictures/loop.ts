import type { ChartConfiguration } from 'chart.js';
import type { Loop } from '../../scenario/loops.ts';
import type { RunResult } from '../../study/result.ts';
import { shown, withUnit } from '../figures.ts';
import { outputText, reportLines } from '../loop-words.ts';
import { packed, upsetWords, WIDEST } from './heading.ts';
import { type Panel, type PanelLine, panelSheet } from './panels.ts';
import { fileName, type Part, type Picture } from './picture.ts';
import { short } from './style.ts';
import { timeUnit } from './time-axis.ts';

/** Signals of one loop: what it measures and is asked to keep, its output between its limits, and the flow that it sets. */
export const loopSignals: Picture<RunResult> = {
  name: (_, part) => fileName('loop', part?.train ?? ''),
  parts: (r) => (r.plant.scenario.loops ?? []).map((l) => ({ train: l.name, solute: '' })),
  config,
};

function config(r: RunResult, part?: Part): ChartConfiguration {
  const s = r.plant.scenario;
  const loops = s.loops ?? [];
  const index = Math.max(
    0,
    loops.findIndex((l) => l.name === part?.train),
  );
  const loop = loops[index];
  const report = r.loops.filter((_, i) => i === index);
  const unit = timeUnit(s.horizon);
  return panelSheet({
    title: `${loop.name}: ${loop.measure.of} and what it moves`,
    answer: [
      ...packed(
        reportLines([loop], report).map((l) =>
          l
            .replace(/^LOOP\s+/, '')
            .replace(/\s+/g, ' ')
            .trim(),
        ),
      ).slice(0, 2),
      ...packed(upsetWords(r.shades, unit)).slice(0, 1),
    ].map((l) => short(l, WIDEST)),
    source: `${short(s.title, 60)}: signals of ${loop.name}, keeps ${withUnit(loop.keepAt, 'kg/m^3')}`,
    span: s.horizon,
    panels: [measured(r, loop), output(r, loop), ...flow(r, loop)],
    shades: r.shades,
  });
}

/** An output of the System as it was recorded. */
function line(r: RunResult, path: string, label: string): PanelLine[] {
  const i = r.plant.system.outputs.findIndex((o) => o.path === path);
  if (i < 0) return [];
  const { factor } = shown(r.plant.system.outputs[i].unit);
  return [{ label, data: r.records.times.map((x, k) => ({ x, y: r.records.rows[k][i] * factor })) }];
}

function measured(r: RunResult, loop: Loop): Panel {
  const { of } = loop.measure;
  return {
    title: of.slice(of.lastIndexOf('.') + 1),
    unit: 'g/L',
    weight: 2,
    lines: [
      ...line(r, of, of),
      ...line(r, `${loop.name}.measurement`, 'as measured'),
      ...line(r, `${loop.name}.set point`, 'set point'),
    ],
    limits: r.limits
      .filter((l) => l.path === of)
      .map((l) => ({
        value: l.limit.value,
        label: `limit ${l.limit.side === 'below' ? '<' : '>'} ${withUnit(l.limit.value, l.unit)}`,
        from: l.limit.from,
      })),
    from: 0,
  };
}

function output(r: RunResult, loop: Loop): Panel {
  const { kind, low, high } = loop.move;
  const factor = kind === 'flow' ? 3600 : 1;
  const lines = line(r, `${loop.name}.output`, `${loop.name} output`);
  const [least, most] = lines
    .flatMap((l) => l.data)
    .reduce(([a, b], p) => [Math.min(a, p.y), Math.max(b, p.y)], [Infinity, -Infinity]);
  // A limit far from where the output goes would flatten it.
  const near = (v: number): boolean =>
    v >= least - 0.6 * (most - least || most) && v <= most + 0.6 * (most - least || most);
  return {
    title: { ratio: 'ratio', flow: 'flow', 'set point': 'set point' }[kind],
    unit: { ratio: '-', flow: 'm³/h', 'set point': 'g/L' }[kind],
    weight: 1,
    lines,
    limits: [
      { value: low * factor, label: `low ${outputText(loop, low)}`, from: 0 },
      { value: high * factor, label: `high ${outputText(loop, high)}`, from: 0 },
    ].filter((l) => near(l.value)),
    from: 0,
  };
}

/** The flow that a ratio comes to; a loop that moves the flow itself shows it already. */
function flow(r: RunResult, loop: Loop): Panel[] {
  if (loop.move.kind !== 'ratio') return [];
  const tank = r.plant.scenario.tanks.find((t) => `${t.name}.flow` === loop.move.quantity);
  const path = tank ? `${tank.to}.flow` : loop.move.quantity;
  const lines = line(r, path, path);
  return lines.length === 0 ? [] : [{ title: 'flow', unit: 'm³/h', weight: 1, lines, limits: [], from: 0 }];
}
