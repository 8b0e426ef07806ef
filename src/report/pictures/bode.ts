import type { ChartConfiguration } from 'chart.js';
import type { Tuned } from '../../study/tune/tune.ts';
import { figure } from '../figures.ts';
import type { Picture } from './picture.ts';
import { captions, lineStyle, named, short } from './style.ts';

/** Gain and phase of the open loops over frequency, with the margins of the best marked. */
export const bode: Picture<Tuned> = { name: () => 'bode.png', config };

/** Cycles per hour are what people count. */
const PER_HOUR = 3600 / (2 * Math.PI);

function config(r: Tuned): ChartConfiguration {
  const { loop } = r.joined.loops[r.loop];
  const { margins } = r.best.candidate;
  const style = (i: number, name: string): object => ({
    pointRadius: 0,
    pointStyle: 'line' as const,
    ...lineStyle(i),
    borderWidth: name === r.best.name ? 3.5 : 2,
  });
  const gains = r.curves.map((c, i) => ({
    label: c.name,
    data: c.omega.map((w, k) => ({ x: w * PER_HOUR, y: c.magnitude[k] })),
    yAxisID: 'gain',
    ...style(i, c.name),
  }));
  const phases = r.curves.map((c, i) => ({
    label: '',
    data: c.omega.map((w, k) => ({ x: w * PER_HOUR, y: c.phase[k] })),
    yAxisID: 'phase',
    ...style(i, c.name),
  }));
  const annotations: Record<string, object> = {};
  const mark = (key: string, omega: number, text: string, adjust: number): void => {
    if (!Number.isFinite(omega)) return;
    annotations[key] = {
      type: 'line',
      xMin: omega * PER_HOUR,
      xMax: omega * PER_HOUR,
      borderColor: '#666666',
      borderWidth: 1.5,
      borderDash: [2, 3],
      label: {
        display: true,
        content: text,
        position: 'start',
        yAdjust: adjust,
        backgroundColor: '#ffffff',
        color: '#222222',
        font: { size: 12 },
        padding: 3,
      },
    };
  };
  mark('crossover', margins.crossover, `phase margin ${figure(margins.phase, 2)}°`, -10);
  mark('half', margins.crossover180, `gain margin ${figure(margins.gain, 2)}`, -34);
  const half = (axis: string, y: number): object => ({
    type: 'line',
    yScaleID: axis,
    yMin: y,
    yMax: y,
    borderColor: '#666666',
    borderWidth: 1,
  });
  annotations.one = half('gain', 1);
  annotations.turned = half('phase', -180);
  const lowest = Math.min(-200, ...r.curves.flatMap((c) => c.phase));
  return {
    type: 'line',
    data: { datasets: [...gains, ...phases] } as ChartConfiguration['data'],
    options: {
      parsing: false,
      layout: { padding: { left: 6, right: 22, bottom: 4 } },
      scales: {
        x: {
          type: 'logarithmic',
          title: {
            display: true,
            text: [
              'frequency [cycles/h]',
              `${short(r.joined.plant.scenario.title, 60)}: exact response of the sampled loop, up to half a turn a sample`,
            ],
          },
          ticks: {
            callback: (v) =>
              /^[125]/.test(Number(v).toExponential()) ? String(Number(Number(v).toPrecision(2))) : null,
          },
        },
        phase: {
          type: 'linear',
          stack: 'panels',
          stackWeight: 1,
          min: Math.floor(lowest / 30) * 30,
          max: -30,
          title: { display: true, text: ['phase', '[degrees]'] },
          ticks: { stepSize: 30, callback: (v) => (Number(v) === -30 ? null : String(v)) },
          afterFit: (scale: { width: number }) => {
            scale.width = 84;
          },
        },
        gain: {
          type: 'logarithmic',
          stack: 'panels',
          stackWeight: 1,
          title: { display: true, text: ['gain |L|', '[-]'] },
          ticks: { callback: (v) => (/^1e/.test(Number(v).toExponential()) ? String(v) : null) },
          afterFit: (scale: { width: number }) => {
            scale.width = 84;
          },
        },
      },
      plugins: {
        ...named(
          captions(`${loop.name}: open loops over frequency`, [
            `${r.best.name}: gain margin ${figure(margins.gain, 2)}, phase margin ${figure(margins.phase, 2)}°, spare delay ${figure(margins.delay / 60, 2)} min, sensitivity ${figure(margins.sensitivity)}`,
          ]),
        ),
        annotation: { annotations },
      } as NonNullable<ChartConfiguration['options']>['plugins'],
    },
  };
}
