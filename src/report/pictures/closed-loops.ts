import type { ChartConfiguration } from 'chart.js';
import type { Proof } from '../../study/tune/prove.ts';
import type { Tuned } from '../../study/tune/tune.ts';
import { figure, withUnit } from '../figures.ts';
import { outputText } from '../loop-words.ts';
import { type PanelLine, panelSheet } from './panels.ts';
import type { Picture } from './picture.ts';
import { named, short } from './style.ts';

/** Curves on one picture; more hide each other. */
const MOST = 4;

/** The best candidates, what is set now, and manual: measurement and output through the upsets. */
export const closedLoops: Picture<Tuned> = { name: () => 'closed-loops.png', config };

function shown(r: Tuned): Proof[] {
  const named = [r.best.name, 'as set', 'manual'];
  const first = r.proofs.filter((p) => named.includes(p.name));
  const more = r.proofs.filter((p) => !named.includes(p.name)).slice(0, MOST - first.length);
  return [...first, ...more].sort((a, b) => r.proofs.indexOf(a) - r.proofs.indexOf(b));
}

function config(r: Tuned): ChartConfiguration {
  const { loop } = r.joined.loops[r.loop];
  const s = r.joined.plant.scenario;
  const { kind } = loop.move;
  const factor = kind === 'flow' ? 3600 : 1;
  const line = (p: Proof, values: readonly number[], by: number): PanelLine => ({
    label: p.name,
    data: p.trial.trace.times.map((x, k) => ({ x, y: values[k] * by })),
  });
  const list = shown(r);
  const limits = r.best.trial.limits
    .filter((l) => l.path === loop.measure.of)
    .map((l) => ({
      value: l.limit.value,
      label: `limit ${l.limit.side === 'below' ? '<' : '>'} ${withUnit(l.limit.value, l.unit)}`,
      from: 0,
    }));
  const worst = list.map((p) => `${p.name} ${figure(p.worst)}`).join(', ');
  const sheet = panelSheet({
    title: `${loop.name}: closed loops through the upsets`,
    answer: [
      short(`Use ${r.best.name}. Worst ${loop.measure.of} [g/L]: ${worst}`, 140),
      short(r.shades.map((q, i) => `${i + 1}: ${q.words}`).join('; '), 140),
    ],
    source: `${short(s.title, 60)}: from the steady state at ${withUnit(loop.keepAt, 'kg/m^3')}, output ${outputText(loop, r.atRest.output)}`,
    span: s.horizon,
    panels: [
      {
        title: loop.measure.of,
        unit: 'g/L',
        weight: 2,
        lines: list.map((p) => line(p, p.trial.trace.measured, 1)),
        limits: [
          ...limits,
          { value: loop.keepAt, label: `set point ${withUnit(loop.keepAt, 'kg/m^3')}`, from: 0 },
        ],
        from: 0,
      },
      {
        title: kind === 'set point' ? 'set point moved' : kind === 'ratio' ? 'ratio' : 'flow',
        unit: { ratio: '-', flow: 'm^3/h', 'set point': 'g/L' }[kind],
        weight: 1,
        lines: list.map((p) => line(p, p.trial.trace.output, factor)),
        limits: [],
        from: 0,
      },
    ],
    shades: r.shades,
  });
  // A candidate looks the same in both fields and is named once.
  const { datasets } = sheet.data;
  const half = datasets.length / 2;
  for (let i = 0; i < half; i++) {
    const { borderColor, backgroundColor } = datasets[i];
    Object.assign(datasets[i + half], {
      borderColor,
      backgroundColor,
      borderDash: (datasets[i] as { borderDash?: number[] }).borderDash,
      label: '',
    });
  }
  named(sheet.options?.plugins ?? {});
  return sheet;
}
