import type { CommissionResult } from '../../study/commission/commission.ts';
import type { Compared, Comparison } from '../../study/commission/comparison.ts';
import { figure, shown } from '../figures.ts';
import { startWords } from '../screen.ts';
import { type Panel, panelSheet } from './panels.ts';
import type { Picture } from './picture.ts';
import { short } from './style.ts';

const MOST_PANELS = 4;

/** Plant samples over the run, a panel for each quantity. */
export const comparison: Picture<CommissionResult> = {
  name: () => 'comparison.png',
  parts: (r) => (r.comparison && r.comparison.columns.length > 0 ? [{ train: '', solute: '' }] : []),
  config(r) {
    const data = r.comparison as Comparison;
    const s = r.plant.scenario;
    return panelSheet({
      title: `${short(s.title, 60)}: model and plant`,
      answer: data.columns.slice(0, MOST_PANELS).map((c) => short(verdict(c), 150)),
      source: `${short(s.title, 60)}: samples of ${short(data.file, 40)}, start ${startWords(s)}`,
      span: r.run.records.times[r.run.records.times.length - 1],
      panels: data.columns.slice(0, MOST_PANELS).map((c) => panel(r, c)),
      shades: r.run.shades,
    });
  },
};

function verdict(c: Compared): string {
  const { unit, factor } = shown(c.unit);
  const side = c.bias >= 0 ? 'above' : 'below';
  return `${c.path}: model ${figure(Math.abs(c.bias) * factor)} ${unit} ${side} the plant on average, RMSE ${figure(c.rmse * factor)} ${unit} over ${c.times.length} samples`;
}

function panel(r: CommissionResult, c: Compared): Panel {
  const { unit, factor } = shown(c.unit);
  const { times, rows } = r.run.records;
  const output = r.plant.system.outputs.findIndex((o) => o.path === c.path);
  return {
    title: c.path.slice(c.path.lastIndexOf('.') + 1),
    unit,
    weight: 1,
    lines: [
      { label: `${c.path}, model`, data: times.map((x, k) => ({ x, y: rows[k][output] * factor })) },
      {
        label: `● ${c.path}, plant`,
        data: c.times.map((x, k) => ({ x, y: c.plant[k] * factor })),
        marks: true,
      },
    ],
    limits: [],
    from: 0,
  };
}
