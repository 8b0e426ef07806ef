import type { ChartConfiguration } from 'chart.js';
import type { Diagram } from '../../study/diagram.ts';
import { inner } from './axis.ts';
import { moment } from './moment.ts';
import { fileName, type Part, type Picture } from './picture.ts';
import { captions, colours, legend, short } from './style.ts';

interface HasDiagrams {
  readonly diagrams: readonly Diagram[];
  readonly plant: { readonly scenario: { readonly title: string } };
}

const MOST_MOMENTS = 4;
/** The legend stretches markers, so the marker is part of the text. */
const STAGE = '◆ stage (mixer)';

/** Operating diagram of a train: isotherm, operating line and stage points, one field for each moment. */
export const operating: Picture<HasDiagrams> = {
  name: (_, part) => fileName('operating', (part as Part).train, (part as Part).solute),
  parts: (r) => r.diagrams.map(({ train, solute }) => ({ train, solute })),
  config(r, part) {
    const d = r.diagrams.find((q) => q.train === part?.train && q.solute === part.solute) as Diagram;
    return config(d, r.plant.scenario.title);
  },
};

/**
 * The fields of the picture share axes by row and column: with two columns of x axes and up to two rows of y axes in
 * one chart, each moment takes the pair that makes its field.
 */
function config(d: Diagram, title: string): ChartConfiguration {
  // Where solutes compete, a plant without any has nothing to show.
  const some = d.moments.filter((m) => m.stages.some((p) => p.x > 0 || p.y > 0));
  const moments = (d.competing && some.length > 0 ? some : d.moments).slice(0, MOST_MOMENTS);
  const across = moments.length > 1 ? 2 : 1;
  const down = Math.ceil(moments.length / across);
  const all = moments.flatMap((m) => [...m.operating.filter((p) => Number.isFinite(p.x)), ...m.stages]);
  const maxX = wholeSteps(1.04 * Math.max(1e-9, ...all.map((p) => p.x)));
  const minX = d.competing ? fromSteps(0.97 * Math.min(...all.map((p) => p.x)), maxX) : 0;
  const maxY = wholeSteps(1.1 * Math.max(1e-9, ...all.map((p) => p.y)));
  const datasets = moments.flatMap((m, i) => {
    const axes = { xAxisID: `x${i % across}`, yAxisID: `y${down - 1 - Math.floor(i / across)}` };
    const curve = m.isotherm.filter((p) => p.y <= maxY * 1.0001 && p.x <= maxX * 1.0001);
    return [
      {
        label: 'equilibrium',
        data: curve,
        ...axes,
        showLine: true,
        pointRadius: 0,
        pointStyle: 'line' as const,
        borderColor: colours[0],
        backgroundColor: colours[0],
        borderWidth: 2,
        tension: 0,
      },
      {
        label: 'operating line',
        data: [...m.operating],
        ...axes,
        showLine: true,
        pointRadius: 0,
        pointStyle: 'line' as const,
        borderColor: colours[1],
        backgroundColor: colours[1],
        borderDash: [9, 4],
        borderWidth: 2,
      },
      {
        label: STAGE,
        data: [...m.stages],
        ...axes,
        showLine: false,
        pointRadius: m.stages.length > 40 ? 2.5 : 5,
        pointStyle: 'rectRot' as const,
        borderColor: colours[2],
        backgroundColor: colours[2],
      },
    ];
  });
  const scales: Record<string, unknown> = {};
  for (let i = 0; i < across; i++)
    scales[`x${i}`] = {
      type: 'linear',
      position: 'bottom',
      stack: 'across',
      stackWeight: 1,
      min: minX,
      max: maxX,
      title: {
        display: true,
        text:
          i === 0
            ? [`aqueous ${short(d.solute, 20)} [g/L]`, short(title, 60)]
            : [`aqueous ${short(d.solute, 20)} [g/L]`, ''],
      },
      ticks: { stepSize: step(maxX - minX), autoSkip: false, maxRotation: 0, callback: inner },
      grid: { color: '#e2e2e2' },
      border: { color: '#888888' },
    };
  for (let i = 0; i < down; i++)
    scales[`y${i}`] = {
      type: 'linear',
      position: 'left',
      stack: 'down',
      stackWeight: 1,
      min: 0,
      max: maxY,
      title: { display: true, text: `organic ${short(d.solute, 20)} [g/L]` },
      ticks: { stepSize: step(maxY), autoSkip: false, callback: inner },
      grid: { color: (c: { tick?: { value: number } }) => (c.tick?.value === 0 ? '#888888' : '#e2e2e2') },
      border: { color: '#888888' },
    };
  const low = labelGoesBelow(moments, maxX, maxY);
  const annotations = moments.map((m, i) => ({
    type: 'label',
    xScaleID: `x${i % across}`,
    yScaleID: `y${down - 1 - Math.floor(i / across)}`,
    xValue: minX + (low ? 0.98 : 0.02) * (maxX - minX),
    yValue: (low ? 0.05 : 0.95) * maxY,
    position: low ? { x: 'end', y: 'end' } : { x: 'start', y: 'start' },
    content: moment(m),
    font: { size: 14, weight: 'bold' },
    backgroundColor: 'rgba(255,255,255,0.85)',
    padding: 3,
  }));
  return {
    type: 'scatter',
    data: { datasets: datasets as never },
    options: {
      layout: { padding: { left: 6, right: 22, bottom: 4 } },
      scales: scales as never,
      plugins: {
        ...captions(`${short(d.train, 40)}: operating diagram, ${d.solute}`, [
          `${d.along}; a stage on the curve is at equilibrium`,
        ]),
        legend: legend((i) => i < 3),
        annotation: { annotations },
      } as never,
    },
  };
}

/** The end of an axis on a whole number of ticks. */
const wholeSteps = (v: number): number => Math.ceil(v / step(v)) * step(v);

/** The start of an axis on a whole number of its ticks; zero where that is near. */
function fromSteps(v: number, max: number): number {
  const size = step(max - v);
  const start = Math.floor(v / size) * size;
  return start > 0.2 * max ? start : 0;
}

/** A round tick distance that gives five to ten ticks. */
function step(span: number): number {
  const size = 10 ** Math.floor(Math.log10(span / 5));
  return [1, 2, 5, 10].map((f) => f * size).find((v) => span / v <= 8) ?? span / 5;
}

/** Labels stand at the top left, or at the bottom right where less is drawn. */
function labelGoesBelow(moments: Diagram['moments'], maxX: number, maxY: number): boolean {
  const drawn = moments.flatMap((m) => [...m.isotherm, ...m.operating, ...m.stages]);
  const count = (left: number, bottom: number): number =>
    drawn.filter((p) => {
      const x = p.x / maxX - left;
      const y = p.y / maxY - bottom;
      return x > 0 && x < 0.4 && y > 0 && y < 0.2;
    }).length;
  return count(0.6, 0.03) < count(0, 0.8);
}
