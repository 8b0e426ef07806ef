import type { Chart, ChartConfiguration, Plugin } from 'chart.js';
import type { StartSizeMap } from '../../study/rehearse/map.ts';
import type { RehearseResult } from '../../study/rehearse/rehearse.ts';
import { figure, shown } from '../figures.ts';
import { sizeWords } from '../rehearse-words.ts';
import type { Picture } from './picture.ts';
import { captions, LIMIT, short } from './style.ts';
import { tickStep, timeUnit } from './time-axis.ts';

/** What the pictures of a rehearsal are drawn from. */
export interface Rehearsed {
  readonly result: RehearseResult;
  readonly map: StartSizeMap | null;
}

/** Start × size of one answer: worst value or time out of the limit by colour, with the contour of the limit. */
export const startSize: Picture<Rehearsed> = {
  name: () => 'start-size.png',
  parts: ({ map }) => (map ? [{ train: '', solute: '' }] : []),
  config: ({ result, map }) => config(result, map as StartSizeMap),
};

type Colour = (v: number) => string;

function config(r: RehearseResult, m: StartSizeMap): ChartConfiguration {
  const { first } = r.ground;
  const xs = m.starts.map((t) => t - first);
  const unit = timeUnit(xs[xs.length - 1]);
  const x = xs.map((t) => t / unit.seconds);
  const y = m.sizes.map((s) => 100 * s);
  const [dx, dy] = [x[1] - x[0], y[1] - y[0]];
  const { unit: text, factor } = shown(m.unit);
  const known = m.values.flat().filter(Number.isFinite);
  const [least, most] = [Math.min(...known), Math.max(...known)];
  const colour = colours(least, most, m);
  const cells = m.values.flatMap((row, k) => row.map((v, i) => ({ x: x[i], y: y[k], v })));
  const answer = r.answers.find((a) => a.answer.name === m.answer);
  const what = m.of === 'worst' ? `worst ${m.path}` : `time out of the limit on ${m.path}`;
  return {
    type: 'matrix' as ChartConfiguration['type'],
    data: {
      datasets: [
        {
          label: what,
          data: cells as never,
          backgroundColor: cells.map((c) => (Number.isFinite(c.v) ? colour(c.v) : '#ffffff')),
          borderWidth: 0,
          width: ({ chart }: { chart: Chart }) => (chart.chartArea?.width ?? 0) / x.length + 0.6,
          height: ({ chart }: { chart: Chart }) => (chart.chartArea?.height ?? 0) / y.length + 0.6,
        } as never,
      ],
    },
    options: {
      layout: { padding: { left: 6, right: 130, bottom: 4 } },
      scales: {
        x: {
          type: 'linear',
          min: x[0] - dx / 2,
          max: x[x.length - 1] + dx / 2,
          offset: false,
          title: {
            display: true,
            text: [
              `start of the answer after the upset began [${unit.name}]`,
              short(`${r.scenario.title}: ${m.answer}, ${m.starts.length} × ${m.sizes.length} runs`, 120),
            ],
          },
          ticks: { stepSize: tickStep(x[x.length - 1], 16, unit), includeBounds: false, maxRotation: 0 },
          grid: { display: false },
        },
        y: {
          type: 'linear',
          min: y[0] - dy / 2,
          max: y[y.length - 1] + dy / 2,
          offset: false,
          reverse: false,
          title: {
            display: true,
            text: `size [% of the answer as written${answer ? `: ${sizeWords(answer.answer, 1, r.plant)}` : ''}]`,
          },
          ticks: { includeBounds: false, stepSize: 25 },
          grid: { display: false },
        },
      },
      plugins: {
        ...captions(`${short(m.answer, 50)}: how late and how little is enough`, [
          `${what}: blue where the limit is kept, red line where it is just kept${m.of === 'worst' ? ` (${figure(m.limit * factor)} ${text})` : ''}.`,
          'The ring marks the answer as written.',
        ]),
        legend: { display: false },
      } as never,
    },
    plugins: [contour(r, m, unit.seconds), bar(least, most, m, colour)],
  };
}

/** Blue where the limit is kept, orange to brown where it is broken; lightness rises and falls away from the limit. */
function colours(least: number, most: number, m: StartSizeMap): Colour {
  const mix = (from: readonly number[], to: readonly number[], share: number): string => {
    const s = Math.min(1, Math.max(0, Number.isFinite(share) ? share : 0));
    return `rgb(${from.map((c, k) => Math.round(c + (to[k] - c) * s)).join(',')})`;
  };
  const bad = m.side === 'below' || m.of === 'time' ? 1 : -1;
  const [good, poor] = bad > 0 ? [least, most] : [most, least];
  return (v) => {
    const over = bad * (v - m.limit);
    return over > 0
      ? mix([253, 224, 160], [150, 52, 4], over / (bad * (poor - m.limit)))
      : mix([206, 226, 240], [8, 64, 120], over / (bad * (good - m.limit)));
  };
}

function contour(r: RehearseResult, m: StartSizeMap, seconds: number): Plugin {
  return {
    id: 'contour',
    afterDatasetsDraw(chart) {
      const { ctx, scales } = chart;
      const px = (t: number): number => scales.x.getPixelForValue((t - r.ground.first) / seconds);
      const py = (s: number): number => scales.y.getPixelForValue(100 * s);
      ctx.save();
      ctx.strokeStyle = LIMIT;
      ctx.lineWidth = 3;
      for (const [a, b] of m.contour) {
        ctx.beginPath();
        ctx.moveTo(px(a.start), py(a.size));
        ctx.lineTo(px(b.start), py(b.size));
        ctx.stroke();
      }
      const start = r.answers.find((a) => a.answer.name === m.answer)?.plan.starts[0] ?? null;
      if (start !== null && start <= m.starts[m.starts.length - 1] && start >= m.starts[0]) {
        ctx.strokeStyle = '#000000';
        ctx.lineWidth = 2.5;
        ctx.beginPath();
        ctx.arc(px(start), py(1), 9, 0, 2 * Math.PI);
        ctx.stroke();
      }
      ctx.restore();
    },
  };
}

/** What the colours mean, beside the map, with the limit marked. */
function bar(least: number, most: number, m: StartSizeMap, colour: Colour): Plugin {
  const { unit, factor } = shown(m.unit);
  return {
    id: 'bar',
    afterDraw(chart) {
      const { ctx, chartArea: area } = chart;
      const x = area.right + 24;
      const steps = 140;
      const span = most - least || 1;
      for (let i = 0; i < steps; i++) {
        ctx.fillStyle = colour(most - (span * (i + 0.5)) / steps);
        ctx.fillRect(x, area.top + (area.height * i) / steps, 20, area.height / steps + 0.6);
      }
      ctx.textAlign = 'left';
      ctx.textBaseline = 'middle';
      ctx.font = `13px ${chart.options.font && 'family' in chart.options.font ? chart.options.font.family : 'upsettle-sans'}`;
      const place = (v: number): number => area.top + (area.height * (most - v)) / span;
      const inside = m.limit > least && m.limit < most;
      const label = (v: number, ink: string): void => {
        ctx.fillStyle = ink;
        ctx.fillText(figure(v * factor), x + 28, Math.min(area.bottom - 7, Math.max(area.top + 7, place(v))));
      };
      for (const v of [most, (most + least) / 2, least])
        if (!inside || Math.abs(place(v) - place(m.limit)) > 18) label(v, '#222222');
      if (inside) {
        ctx.fillStyle = LIMIT;
        ctx.fillRect(x - 4, place(m.limit) - 1.5, 28, 3);
        label(m.limit, LIMIT);
      }
      ctx.fillStyle = '#222222';
      ctx.fillText(unit, x, area.top - 12);
    },
  };
}
