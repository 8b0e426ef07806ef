import type { ChartConfiguration } from 'chart.js';
import type { Tuned } from '../../study/tune/tune.ts';
import { figure } from '../figures.ts';
import type { Picture } from './picture.ts';
import { captions, LIMIT, lineStyle, short } from './style.ts';

/** Window of the complex plane: what matters lies about −1; in the shape of the sheet, so that a circle is one. */
const WINDOW = { left: -2.5, right: 1.25, down: -1.1, up: 0.7 } as const;

/** Open loops in the complex plane, with the circle that they must stay outside of. */
export const nyquist: Picture<Tuned> = { name: () => 'nyquist.png', config };

function config(r: Tuned): ChartConfiguration {
  const { loop } = r.joined.loops[r.loop];
  const lines = r.curves.map((c, i) => ({
    label: c.name,
    data: c.re.map((x, k) => ({ x, y: c.im[k] })),
    showLine: true,
    pointRadius: 0,
    pointStyle: 'line' as const,
    ...lineStyle(i),
    borderWidth: c.name === r.best.name ? 3.5 : 2,
  }));
  const circle = {
    label: `sensitivity ${figure(r.sensitivity)}`,
    data: [...r.circle],
    showLine: true,
    pointRadius: 0,
    borderColor: LIMIT,
    backgroundColor: 'rgba(176, 0, 32, 0.08)',
    borderDash: [2, 3],
    borderWidth: 2,
    fill: true,
  };
  const told = r.candidates
    .filter((c) => r.curves.some((q) => q.name === c.name))
    .map((c) => `${c.name}: Ms ${c.margins.stable ? figure(c.margins.sensitivity) : 'unstable'}`);
  return {
    type: 'scatter',
    data: { datasets: [...lines, circle] },
    options: {
      layout: { padding: { left: 6, right: 22, bottom: 4 } },
      scales: {
        x: {
          min: WINDOW.left,
          max: WINDOW.right,
          ticks: { stepSize: 0.5 },
          title: {
            display: true,
            text: [
              'real part of L [-]',
              `${short(r.joined.plant.scenario.title, 60)}: exact response of the sampled loop, up to half a turn a sample`,
            ],
          },
        },
        y: {
          min: WINDOW.down,
          max: WINDOW.up,
          ticks: { stepSize: 0.2 },
          title: { display: true, text: 'imaginary part of L [-]' },
        },
      },
      plugins: {
        ...captions(`${loop.name}: open loops about the point -1`, [
          `A loop outside the circle has Ms of at most ${figure(r.sensitivity)}. ${told.join('; ')}`,
        ]),
        annotation: {
          annotations: {
            point: {
              type: 'point',
              xValue: -1,
              yValue: 0,
              radius: 5,
              backgroundColor: LIMIT,
              borderWidth: 0,
            },
            name: {
              type: 'label',
              xValue: -1,
              yValue: 0.07,
              content: '-1',
              font: { size: 13 },
              color: LIMIT,
            },
          },
        },
      } as NonNullable<ChartConfiguration['options']>['plugins'],
    },
  };
}
