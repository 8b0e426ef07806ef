import type { ChartConfiguration } from 'chart.js';
import type { FrequencyView } from '../../study/rehearse/frequency.ts';
import { clock, figure, shown } from '../figures.ts';
import { inner } from './axis.ts';
import type { Picture } from './picture.ts';
import type { Rehearsed } from './start-size.ts';
import { captions, LIMIT, lineStyle, short } from './style.ts';

/** Ticks that clocks of people have [h]. */
const TICKS = [1 / 12, 0.25, 0.5, 1, 2, 4, 8, 24, 48, 96, 240];

/** Which periods of a feed's swing reach the limited quantity: amplitude ratio and lag over the period. */
export const frequency: Picture<Rehearsed> = {
  name: () => 'frequency.png',
  parts: ({ result: r }) => (r.frequency ? [{ train: '', solute: '' }] : []),
  config: ({ result: r }) => config(r.frequency as FrequencyView, r.scenario.title),
};

function config(f: FrequencyView, title: string): ChartConfiguration {
  const [input, output] = [shown(f.inputUnit), shown(f.outputUnit)];
  const factor = output.factor / input.factor;
  const hours = f.periods.map((p) => p / 3600);
  const line = (label: string, values: readonly number[], axis: string, style: number) => ({
    label,
    data: values.map((y, i) => ({ x: hours[i], y })),
    yAxisID: axis,
    pointRadius: 0,
    pointStyle: 'line' as const,
    ...lineStyle(style),
  });
  const annotations: Record<string, object> = {};
  const mark = (name: string, period: number | null, text: string, colour: string, at: string): void => {
    if (period === null) return;
    const upright = {
      type: 'line',
      xScaleID: 'x',
      xMin: period / 3600,
      xMax: period / 3600,
      borderColor: colour,
      borderWidth: 1.5,
      borderDash: [4, 4],
    };
    annotations[`${name} below`] = { ...upright, yScaleID: 'lag' };
    annotations[name] = {
      ...upright,
      yScaleID: 'ratio',
      label: {
        display: true,
        content: text,
        position: at,
        xAdjust: 100,
        yAdjust: at === 'start' ? -14 : 10,
        color: colour,
        backgroundColor: 'rgba(255,255,255,0.9)',
        padding: 2,
        font: { size: 12 },
      },
    };
  };
  mark('half', f.half, `half gets through: ${f.half === null ? '' : clock(f.half)}`, '#444444', 'start');
  mark(
    'reach',
    f.reaches,
    `upset-sized swings break the limit: ${f.reaches === null ? '' : clock(f.reaches)}`,
    LIMIT,
    'end',
  );
  const unitOf = (u: string): string => (u === '' ? '-' : u.replace('^3', '³'));
  return {
    type: 'line',
    data: {
      datasets: [
        line(
          'amplitude ratio',
          f.ratios.map((v) => v * factor),
          'ratio',
          0,
        ),
        line(
          'lag',
          f.lags.map((v) => v / 3600),
          'lag',
          1,
        ),
      ],
    },
    options: {
      parsing: false,
      layout: { padding: { left: 6, right: 22, bottom: 4 } },
      scales: {
        x: {
          type: 'logarithmic',
          min: hours[0],
          max: hours[hours.length - 1],
          title: {
            display: true,
            text: [
              'period of the swing [h]',
              short(`${title}: exact linearisation at the steady state`, 130),
            ],
          },
          afterBuildTicks: (axis) => {
            axis.ticks = TICKS.filter(
              (t) => t >= 0.999 * hours[0] && t <= 1.001 * (hours.at(-1) as number),
            ).map((value) => ({ value }));
          },
          ticks: { autoSkip: false, callback: (v) => String(Number(figure(Number(v), 2))) },
        },
        lag: {
          type: 'linear',
          position: 'left',
          stack: 'panels',
          stackWeight: 1,
          title: { display: true, text: 'lag [h]' },
          grace: '6%',
          ticks: { includeBounds: false, callback: inner },
        },
        ratio: {
          type: 'linear',
          position: 'left',
          stack: 'panels',
          stackWeight: 2,
          min: 0,
          grace: '12%',
          title: {
            display: true,
            text: ['amplitude ratio', `[${unitOf(output.unit)} per ${unitOf(input.unit)}]`],
          },
        },
      },
      plugins: {
        ...captions(`${f.input} to ${f.output}: which swings get through`, [
          `Of a lasting change ${figure(f.lasting * factor)} ${unitOf(output.unit)} per ${unitOf(input.unit)} gets through; half of it at a period of ${f.half === null ? 'more than 10 d' : clock(f.half)}.`,
          f.swing === 0
            ? 'Straight from the linearisation: for small swings.'
            : f.reaches === null
              ? `Swings of ±${figure(f.swing * input.factor)} ${input.unit} (as large as the upset) reach the limit at no period, as far as the plant is linear.`
              : `Swings of ±${figure(f.swing * input.factor)} ${input.unit} (as large as the upset) reach the limit from ${clock(f.reaches)} on, as far as the plant is linear.`,
        ]),
        annotation: { annotations },
      } as NonNullable<ChartConfiguration['options']>['plugins'],
    },
  };
}
