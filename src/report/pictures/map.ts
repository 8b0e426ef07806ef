import type { Chart, ChartConfiguration, Plugin } from 'chart.js';
import type { RunResult } from '../../study/result.ts';
import { figure } from '../figures.ts';
import { fileName, type Part, type Picture } from './picture.ts';
import { captions, short } from './style.ts';
import { tickStep, timeUnit } from './time-axis.ts';

/** Cells across: more would be finer than the pixels. */
const ACROSS = 240;
/** Decades of concentration shown below the largest: at most, and at least. */
const MOST_DECADES = 3;
const LEAST_DECADES = 0.5;
/** Labels of the colour bar, one more than its parts. */
const PARTS = 3;

/** Aqueous concentration leaving each stage, over stages and time; colours by the logarithm. */
export const stageTimeMap: Picture<RunResult> = {
  name: (_, part) => fileName('map', (part as Part).train, (part as Part).solute),
  // A map of one or two stages says no more than the curves do.
  parts: (r) =>
    r.plant.scenario.trains
      .filter((t) => t.stages.length > 2)
      .flatMap((t) =>
        r.plant.scenario.solutes.flatMap((solute, i) =>
          t.equilibrium[i] ? [{ train: t.name, solute }] : [],
        ),
      )
      .slice(0, 3),
  config: (r, part) => config(r, part as Part),
};

interface Cell {
  x: number;
  y: number;
  v: number;
}

function config(r: RunResult, { train, solute }: Part): ChartConfiguration {
  const { outputs } = r.plant.system;
  const s = r.plant.scenario;
  const n = s.trains.find((q) => q.name === train)?.stages.length ?? 0;
  const unit = timeUnit(s.horizon);
  const { times, rows } = r.records;
  const end = times[times.length - 1] / unit.seconds;
  const columns = Math.min(ACROSS, times.length);
  const index = Array.from({ length: n }, (_, j) =>
    outputs.findIndex((o) => o.path === `${train}.${j + 1}.settler.aqueous.${solute}`),
  );
  const cells: Cell[] = [];
  let largest = 0;
  for (let k = 0; k < columns; k++) {
    const row =
      rows[Math.min(rows.length - 1, Math.round((k * (rows.length - 1)) / Math.max(1, columns - 1)))];
    for (let j = 0; j < n; j++) {
      const v = row[index[j]];
      if (v > largest) largest = v;
      cells.push({ x: ((k + 0.5) * end) / columns, y: j + 1, v });
    }
  }
  const decades = decadesOf(cells, end, largest);
  const floor = largest / 10 ** decades;
  const colour = (v: number): string => palette(Math.log10(Math.max(v, floor) / floor) / decades);
  return {
    type: 'matrix' as ChartConfiguration['type'],
    data: {
      datasets: [
        {
          label: solute,
          data: cells as never,
          backgroundColor: cells.map((c) => colour(c.v)),
          borderWidth: 0,
          // Half a pixel more than the cell, or the gaps show as stripes.
          width: ({ chart }: { chart: Chart }) => (chart.chartArea?.width ?? 0) / columns + 0.6,
          height: ({ chart }: { chart: Chart }) => (chart.chartArea?.height ?? 0) / n + 0.6,
        } as never,
      ],
    },
    options: {
      layout: { padding: { left: 6, right: 130, bottom: 4 } },
      scales: {
        x: {
          type: 'linear',
          min: 0,
          max: end,
          offset: false,
          title: {
            display: true,
            text: [`time [${unit.name}]`, `${short(s.title, 60)}: aqueous ${solute} leaving each stage`],
          },
          ticks: { stepSize: tickStep(end, 20, unit), maxRotation: 0 },
          grid: { display: false },
        },
        y: {
          type: 'linear',
          min: 0.5,
          max: n + 0.5,
          reverse: true,
          offset: false,
          title: { display: true, text: `stage of ${short(train, 30)}` },
          // The axis runs from half a stage before the first; left alone it would put its ticks between stages.
          afterBuildTicks: (axis) => {
            const every = Math.max(1, Math.round(n / 20));
            axis.ticks = Array.from({ length: Math.ceil(n / every) }, (_, k) => ({ value: 1 + k * every }));
          },
          ticks: { autoSkip: false, callback: (v) => String(v) },
          grid: { display: false },
        },
      },
      plugins: {
        ...captions(`${short(train, 40)}: ${solute} over stages and time`, [
          'Aqueous leaving each stage; stage 1, where the aqueous enters, is on top. Dashed: upsets begin and end.',
        ]),
        legend: { display: false },
        annotation: { annotations: shadeLines(r, unit.seconds) },
      } as never,
    },
    plugins: [colourBar(largest, decades)],
  };
}

/** Decades between the largest concentration and the smallest of the second half, where a start-up is over. */
function decadesOf(cells: readonly Cell[], end: number, largest: number): number {
  const late = cells.filter((c) => c.x > end / 2 && c.v > 0).map((c) => c.v);
  const smallest = late.reduce((a, b) => Math.min(a, b), largest);
  const wanted = Math.ceil(2 * Math.log10(largest / smallest)) / 2;
  return Math.min(MOST_DECADES, Math.max(LEAST_DECADES, Number.isFinite(wanted) ? wanted : MOST_DECADES));
}

function shadeLines(r: RunResult, seconds: number): object[] {
  return r.shades.slice(0, 10).flatMap((q) =>
    [q.from, q.to]
      .filter((t) => t < r.plant.scenario.horizon)
      .map((t) => ({
        type: 'line',
        xMin: t / seconds,
        xMax: t / seconds,
        borderColor: '#ffffff',
        borderWidth: 2,
        borderDash: [5, 4],
      })),
  );
}

/** From dark blue over green to light yellow: rises evenly in lightness, so it also reads in grey. */
function palette(share: number): string {
  const stops = [
    [8, 24, 68],
    [28, 84, 124],
    [42, 140, 128],
    [140, 190, 104],
    [250, 236, 130],
  ];
  const at = (Number.isFinite(share) ? Math.min(0.9999, Math.max(0, share)) : 0) * (stops.length - 1);
  const i = Math.floor(at);
  const f = at - i;
  const mix = stops[i].map((c, k) => Math.round(c + (stops[i + 1][k] - c) * f));
  return `rgb(${mix.join(',')})`;
}

/** What the colours mean, beside the map. */
function colourBar(largest: number, decades: number): Plugin {
  return {
    id: 'colourBar',
    afterDraw(chart) {
      const { ctx, chartArea: area } = chart;
      const x = area.right + 26;
      const steps = 120;
      for (let i = 0; i < steps; i++) {
        ctx.fillStyle = palette(1 - (i + 0.5) / steps);
        ctx.fillRect(x, area.top + (area.height * i) / steps, 20, area.height / steps + 0.6);
      }
      ctx.fillStyle = '#222222';
      ctx.textAlign = 'left';
      ctx.textBaseline = 'middle';
      ctx.font = `13px ${chart.options.font && 'family' in chart.options.font ? chart.options.font.family : 'upsettle-sans'}`;
      for (let d = 0; d <= PARTS; d++) {
        const y = area.top + (area.height * d) / PARTS;
        const text = `${d === PARTS ? '≤ ' : ''}${figure(largest / 10 ** ((decades * d) / PARTS), 2)}`;
        ctx.fillText(text, x + 28, Math.min(area.bottom - 7, Math.max(area.top + 7, y)));
      }
      ctx.fillText('g/L', x, area.top - 12);
    },
  };
}
