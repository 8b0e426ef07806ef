import type { ChartConfiguration } from 'chart.js';
import type { CommissionResult } from '../../study/commission/commission.ts';
import type { Ensemble } from '../../study/commission/ensemble.ts';
import { clock, shown } from '../figures.ts';
import type { Picture } from './picture.ts';
import { captions, colours, dashes, LIMIT, short } from './style.ts';
import { tickStep, timeUnit } from './time-axis.ts';

/** The outlet that comes good last, over all runs of the ensemble: middle, and where eight of ten lie. */
export const fan: Picture<CommissionResult> = {
  name: () => 'ensemble.png',
  parts: (r) => (r.ensemble && r.ensemble.fan.p50.length > 0 ? [{ train: '', solute: '' }] : []),
  config: (r) => config(r, r.ensemble as Ensemble),
};

function config(r: CommissionResult, e: Ensemble): ChartConfiguration {
  const { path, times, p10, p50, p90 } = e.fan;
  const output = r.plant.system.outputs.findIndex((o) => o.path === path);
  const { unit: text, factor } = shown(r.plant.system.outputs[output].unit);
  const span = times[times.length - 1];
  const unit = timeUnit(span);
  const end = span / unit.seconds;
  const line = (label: string, values: readonly number[], i: number, more: object = {}) => ({
    label,
    data: values.map((y, k) => ({ x: times[k] / unit.seconds, y: y * factor })),
    borderColor: colours[i],
    backgroundColor: 'rgba(0, 114, 178, 0.18)',
    borderDash: dashes[i],
    borderWidth: 2,
    pointRadius: 0,
    pointStyle: 'line' as const,
    ...more,
  });
  const { records } = r.run;
  const plain = {
    ...line('as stated', [], 1),
    data: records.times.map((t, k) => ({ x: t / unit.seconds, y: records.rows[k][output] * factor })),
  };
  const annotations: Record<string, object> = {};
  (['p10', 'p50', 'p90'] as const).forEach((key, i) => {
    const t = e.steady[key];
    if (t === null || t > span) return;
    annotations[key] = {
      type: 'line',
      xMin: t / unit.seconds,
      xMax: t / unit.seconds,
      borderColor: LIMIT,
      borderWidth: 1.5,
      borderDash: [2, 3],
      label: {
        display: true,
        z: 5,
        content: `${key.toUpperCase()} at rest ${clock(t)}`,
        position: 'start',
        yAdjust: -22 * (2 - i) - 6,
        xAdjust: t > 0.8 * span ? -80 : 80,
        color: LIMIT,
        backgroundColor: '#ffffff',
        padding: 2,
        font: { size: 12 },
      },
    };
  });
  const most = e.influence
    .slice(0, 3)
    .map((q) => `${q.path} ${q.correlation >= 0 ? '+' : ''}${q.correlation.toFixed(2)}`);
  return {
    type: 'line',
    data: {
      datasets: [
        line('10 of 100 below', p10, 0, { borderWidth: 1, borderDash: dashes[2], fill: '+2' }),
        line('50 of 100 below', p50, 0, { borderWidth: 3 }),
        line('90 of 100 below', p90, 0, { borderWidth: 1, borderDash: dashes[3] }),
        plain,
      ],
    },
    options: {
      parsing: false,
      layout: { padding: { left: 6, right: 22, bottom: 4 } },
      scales: {
        x: {
          type: 'linear',
          min: 0,
          max: end,
          title: {
            display: true,
            text: [
              `time [${unit.name}]`,
              `${short(r.plant.scenario.title, 60)}: ${e.runs} start-ups, Latin hypercube over ${e.inputs.length} inputs, seed ${e.seed}`,
            ],
          },
          ticks: { stepSize: tickStep(end, 20, unit), maxRotation: 0, includeBounds: false },
        },
        y: {
          type: 'linear',
          beginAtZero: true,
          grace: '8%',
          title: { display: true, text: `${path} [${text}]` },
        },
      },
      plugins: {
        ...captions(`${short(r.plant.scenario.title, 60)}: how sure the start-up is`, [
          `At rest (every outlet within 1 % for good): P10 ${said(e.steady.p10)}, P50 ${said(e.steady.p50)}, P90 ${said(e.steady.p90)}`,
          `Rank correlation with that time: ${short(most.join(', '), 130)}`,
        ]),
        annotation: { annotations },
      } as NonNullable<ChartConfiguration['options']>['plugins'],
    },
  };
}

const said = (t: number | null): string => (t === null ? 'not within the run' : clock(t));
