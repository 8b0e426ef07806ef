import type { ChartConfiguration } from 'chart.js';
import type { MapPoint } from '../../study/tune/map.ts';
import type { Tuned } from '../../study/tune/tune.ts';
import { figure } from '../figures.ts';
import type { Picture } from './picture.ts';
import { captions, short } from './style.ts';

/** Colours by sensitivity, told apart in grey as well: sound, lively, beyond, unstable, and no steady state. */
const CLASSES = [
  { label: 'Ms up to 1.6: sound', colour: '#9fd3c7', text: '#111111', is: (m: MapPoint) => ms(m) <= 1.65 },
  { label: 'up to 2: lively', colour: '#F0E442', text: '#111111', is: (m: MapPoint) => ms(m) <= 2 },
  { label: 'beyond 2: not safe', colour: '#E69F00', text: '#111111', is: (m: MapPoint) => ms(m) < Infinity },
  { label: 'unstable', colour: '#7a1020', text: '#ffffff', is: (m: MapPoint) => m.margins !== null },
  { label: 'no steady state, or flow at its limit', colour: '#cccccc', text: '#111111', is: () => true },
] as const;

const ms = ({ margins: m }: MapPoint): number => (m?.stable ? m.sensitivity : Infinity);

/** The chosen settings over the operating range: one square a point, with Ms and the gain of the plant written in it. */
export const marginMap: Picture<Tuned> = { name: () => 'margin-map.png', config };

function config(r: Tuned): ChartConfiguration {
  const { loop } = r.joined.loops[r.loop];
  const { points, throughput, grade } = r.map;
  const flow = loop.move.kind === 'flow' ? 3600 : 1;
  const rowOf = (p: MapPoint): string => {
    const parts = [
      ...(p.throughput === 1 ? [] : [`throughput ${figure(100 * p.throughput)} %`]),
      ...(p.grade === 1 ? [] : [`grade ${figure(100 * p.grade)} %`]),
    ];
    return parts.length === 0 ? 'as stated' : parts.join(', ');
  };
  const order = (q: string): number => {
    const p = points.find((o) => rowOf(o) === q) as MapPoint;
    return 10 * p.throughput + p.grade;
  };
  const rows = [...new Set(points.map(rowOf))].sort((a, b) => order(a) - order(b));
  const columns = [...new Set(points.map((p) => p.output))]
    .sort((a, b) => a - b)
    .map((v) => figure(v * flow));
  const annotations: Record<string, object> = {};
  points.forEach((p, i) => {
    const c = CLASSES.find((q) => q.is(p)) as (typeof CLASSES)[number];
    annotations[`p${i}`] = {
      type: 'label',
      xValue: figure(p.output * flow),
      yValue: rowOf(p),
      content:
        p.gain === null
          ? ['-']
          : [
              p.margins?.stable ? `Ms ${figure(p.margins.sensitivity)}` : 'unstable',
              `gain ${figure(p.gain / flow)}`,
            ],
      color: c.text,
      font: { size: 14 },
    };
  });
  const data = CLASSES.map((c) => ({
    label: c.label,
    data: points
      .filter((p) => CLASSES.find((q) => q.is(p)) === c)
      .map((p) => ({ x: figure(p.output * flow), y: rowOf(p), v: 1 })),
    backgroundColor: c.colour,
    borderColor: '#ffffff',
    borderWidth: 2,
    width: ({ chart }: { chart: { chartArea?: { width: number } } }) =>
      (chart.chartArea?.width ?? 0) / columns.length - 2,
    height: ({ chart }: { chart: { chartArea?: { height: number } } }) =>
      (chart.chartArea?.height ?? 0) / rows.length - 2,
  })).filter((d) => d.data.length > 0);
  const what =
    loop.move.kind === 'ratio'
      ? 'ratio held [-]'
      : loop.move.kind === 'flow'
        ? 'flow held [m³/h]'
        : 'set point held [g/L]';
  const { unsafe } = r.map;
  return {
    type: 'matrix',
    data: { datasets: data },
    options: {
      layout: { padding: { left: 6, right: 22, bottom: 4 } },
      scales: {
        x: {
          type: 'category',
          labels: columns,
          offset: true,
          grid: { display: false },
          title: {
            display: true,
            text: [
              what,
              `${short(r.joined.plant.scenario.title, 60)}: throughput ${throughput ?? 'not varied'}, grade ${grade ?? 'not varied'}; gain in g/L per ${flow === 1 ? 'unit of output' : 'm³/h'}`,
            ],
          },
        },
        y: {
          type: 'category',
          labels: rows,
          offset: true,
          grid: { display: false },
          title: { display: true, text: 'feed [% of stated]' },
        },
      },
      plugins: {
        ...captions(`${loop.name}: ${r.best.name} over the operating range`, [
          unsafe.length === 0
            ? 'The chosen settings are sound or slow all over the range.'
            : `${unsafe.length} of ${points.length} points are not safe with the chosen settings: one set does not serve all.`,
        ]),
        legend: { position: 'top', align: 'start', labels: { boxWidth: 26, boxHeight: 12, padding: 14 } },
        annotation: { annotations },
      } as NonNullable<ChartConfiguration['options']>['plugins'],
    },
  } as unknown as ChartConfiguration;
}
