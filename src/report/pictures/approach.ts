import type { ChartConfiguration } from 'chart.js';
import type { CommissionResult } from '../../study/commission/commission.ts';
import type { ComesGood } from '../../study/commission/good.ts';
import { answerLines } from '../commission-screen.ts';
import { clock, figure } from '../figures.ts';
import { startWords } from '../screen.ts';
import { distinct } from './distinct.ts';
import type { Picture } from './picture.ts';
import { captions, LIMIT, lineStyle, short, wrapped } from './style.ts';
import { tickStep, timeUnit } from './time-axis.ts';

const MOST_LINES = 7;
/** Per cent of the change at the ends of the axis. */
const FLOOR = 0.05;
const BANDS = [10, 5, 2, 1];
const TICKS = [0.1, 1, 2, 5, 10, 100, 1000];

/** How far outlets, streams and tanks are from where they come to rest, in per cent of their change, on a logarithmic axis. */
export const approach: Picture<CommissionResult> = {
  name: () => 'approach.png',
  parts: (r) => (shownOf(r).length > 0 ? [{ train: '', solute: '' }] : []),
  config,
};

/** Those with limits, then those that come good last; solutes before what only follows them. */
function shownOf(r: CommissionResult): ComesGood[] {
  const { solutes } = r.plant.scenario;
  const moving = distinct(r).filter((q) => q.change !== null && q.final !== null);
  const limited = new Set(r.limits.map((l) => l.path));
  const rank = (q: ComesGood): number =>
    limited.has(q.quantity.path) ? 0 : solutes.includes(q.quantity.component) ? 1 : 2;
  const last = (q: ComesGood): number => q.ofChange[3] ?? Number.MAX_VALUE;
  return [...moving].sort((a, b) => rank(a) - rank(b) || last(b) - last(a)).slice(0, MOST_LINES);
}

function config(r: CommissionResult): ChartConfiguration {
  const { times, rows } = r.run.records;
  const s = r.plant.scenario;
  const span = times[times.length - 1];
  const unit = timeUnit(span);
  let highest = 100;
  const datasets = shownOf(r).map((q, i) => ({
    label: q.quantity.path,
    data: times.map((t, k) => {
      const off = (100 * Math.abs(rows[k][q.quantity.output] - (q.final as number))) / (q.change as number);
      highest = Math.max(highest, off);
      // Below the axis the line ends: what crosses its final value would else draw spikes down to nothing.
      return { x: t / unit.seconds, y: off < FLOOR ? Number.NaN : off };
    }),
    pointRadius: 0,
    pointStyle: 'line' as const,
    spanGaps: false,
    ...lineStyle(i),
  }));
  const end = span / unit.seconds;
  const annotations: Record<string, object> = {};
  for (const b of BANDS)
    annotations[`band${b}`] = {
      type: 'line',
      yMin: b,
      yMax: b,
      borderColor: '#777777',
      borderWidth: 1,
      borderDash: [4, 4],
    };
  const marked = r.steady !== null && r.steady > 0 && r.steady < span;
  if (marked)
    annotations.steady = {
      type: 'line',
      xMin: (r.steady as number) / unit.seconds,
      xMax: (r.steady as number) / unit.seconds,
      borderColor: LIMIT,
      borderWidth: 1.5,
      label: {
        display: true,
        content: `at rest within 1 %: ${clock(r.steady as number)}`,
        position: 'end',
        rotation: 0,
        xAdjust: (r.steady as number) > 0.7 * span ? -100 : 100,
        color: LIMIT,
        backgroundColor: 'rgba(255,255,255,0.85)',
        font: { size: 12 },
      },
    };
  return {
    type: 'line',
    data: { datasets },
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
              `${short(s.title, 60)}: approach over ${figure(end)} ${unit.name}, start ${startWords(s)}`,
            ],
          },
          ticks: { stepSize: tickStep(end, 20, unit), maxRotation: 0, includeBounds: false },
        },
        y: {
          type: 'logarithmic',
          min: FLOOR,
          max: highest * 1.3,
          title: { display: true, text: 'distance from the final value [% of the change]' },
          afterBuildTicks: (axis) => {
            axis.ticks = TICKS.filter((v) => v <= highest * 1.3).map((value) => ({ value }));
          },
          ticks: { autoSkip: false, callback: (v) => `${v} %` },
          grid: { color: '#e2e2e2' },
        },
      },
      plugins: {
        ...captions(
          `${short(s.title, 60)}: how it comes to rest`,
          answerLines(r)
            .slice(0, 3)
            .flatMap((l) =>
              wrapped(l.replace(/; never outside, .*$/, ', counted from the first aqueous turnover.'), 150),
            ),
        ),
        annotation: { annotations },
      } as NonNullable<ChartConfiguration['options']>['plugins'],
    },
  };
}
