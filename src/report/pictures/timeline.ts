import type { ChartConfiguration } from 'chart.js';
import type { CommissionResult } from '../../study/commission/commission.ts';
import type { ComesGood } from '../../study/commission/good.ts';
import { clock, withUnit } from '../figures.ts';
import { startWords } from '../screen.ts';
import { distinct } from './distinct.ts';
import type { Picture } from './picture.ts';
import { captions, LIMIT, short } from './style.ts';
import { tickStep, timeUnit } from './time-axis.ts';

const MOST_ROWS = 18;
/** Stages beyond which they are shown train by train. */
const MOST_STAGES = 10;
/** From dark to light as it comes nearer; told apart in grey as well. */
const PARTS = [
  { label: 'farther than 10 % of its change', colour: '#3b4a6b' },
  { label: 'within 10 %', colour: '#0072B2' },
  { label: 'within 5 %', colour: '#56B4E9' },
  { label: 'within 2 %', colour: '#F0E442' },
] as const;

interface Row {
  readonly name: string;
  /** s by band, 10, 5, 2, 1 %. */
  readonly times: readonly number[];
  readonly onSpec: number | null;
}

/** What comes good when: for each outlet, stream, tank and stage a bar until it is within 1 % for good, parted by bands. */
export const timeline: Picture<CommissionResult> = {
  name: () => 'timeline.png',
  parts: (r) => (rowsOf(r).length > 0 ? [{ train: '', solute: '' }] : []),
  config,
};

function rowsOf(r: CommissionResult): Row[] {
  const come = r.quantities.filter((q) => q.ofChange.every((t) => t !== null));
  const limits = new Map(r.limits.map((l) => [l.path, l.from]));
  const single = distinct(r)
    .filter((q) => come.includes(q))
    .map((q) => ({
      name: q.quantity.path,
      times: q.ofChange as number[],
      onSpec: limits.get(q.quantity.path) ?? null,
    }));
  const stages = new Map<string, ComesGood[]>();
  const many =
    new Set(come.filter((q) => q.quantity.kind === 'stage').map((q) => q.quantity.of)).size > MOST_STAGES;
  for (const q of come)
    if (q.quantity.kind === 'stage') {
      const name = many ? `all stages of ${q.quantity.train}` : `stage ${q.quantity.of}`;
      stages.set(name, [...(stages.get(name) ?? []), q]);
    }
  const together = [...stages].map(([name, list]) => ({
    name,
    times: [0, 1, 2, 3].map((i) => Math.max(...list.map((q) => q.ofChange[i] as number))),
    onSpec: null,
  }));
  // A limit on a purity or a ratio has no band of its own, but a time from which on it is kept.
  const named = new Set(single.map((q) => q.name));
  const marks = [...limits]
    .filter(([path, from]) => from !== null && !named.has(path))
    .map(([name, from]) => ({ name, times: [0, 0, 0, 0], onSpec: from }));
  const end = (q: Row): number => Math.max(q.times[3], q.onSpec ?? 0);
  const all = [...single, ...together].sort((a, b) => end(a) - end(b));
  const least = all.slice(0, Math.max(0, all.length + marks.length - MOST_ROWS));
  return [...all.filter((q) => !least.includes(q) || q.onSpec !== null), ...marks].sort(
    (a, b) => end(a) - end(b),
  );
}

function config(r: CommissionResult): ChartConfiguration {
  const rows = rowsOf(r);
  const s = r.plant.scenario;
  const last = Math.max(1, ...rows.flatMap((q) => [...q.times, q.onSpec ?? 0]));
  const unit = timeUnit(last);
  const end = (1.12 * last) / unit.seconds;
  const datasets = PARTS.map((part, i) => ({
    label: part.label,
    data: rows.map((q): [number, number] => [
      (i === 0 ? 0 : q.times[i - 1]) / unit.seconds,
      Math.max(q.times[i], i === 0 ? 0 : q.times[i - 1]) / unit.seconds,
    ]),
    backgroundColor: part.colour,
    borderColor: part.colour,
    borderWidth: 0,
    grouped: false,
    barPercentage: 0.72,
    categoryPercentage: 1,
  }));
  const annotations: Record<string, object> = {};
  rows.forEach((q, i) => {
    annotations[`at${i}`] = {
      type: 'label',
      xValue: Math.max(q.times[3], q.times[3] > 0 ? 0 : (q.onSpec ?? 0)) / unit.seconds,
      yValue: i,
      content: clock(q.times[3] > 0 ? q.times[3] : (q.onSpec ?? 0)),
      xAdjust: 38,
      font: { size: 12 },
      color: '#222222',
    };
    if (q.onSpec !== null)
      annotations[`spec${i}`] = {
        type: 'line',
        xMin: q.onSpec / unit.seconds,
        xMax: q.onSpec / unit.seconds,
        yMin: i - 0.48,
        yMax: i + 0.48,
        borderColor: LIMIT,
        borderWidth: 4,
      };
  });
  const marks = r.limits.filter((l) => l.from !== null && rows.some((q) => q.name === l.path));
  return {
    type: 'bar',
    data: { labels: rows.map((q) => short(q.name, 34)), datasets },
    options: {
      indexAxis: 'y',
      layout: { padding: { left: 6, right: 22, bottom: 4 } },
      scales: {
        x: {
          type: 'linear',
          min: 0,
          max: end,
          title: {
            display: true,
            text: [`time [${unit.name}]`, `${short(s.title, 60)}: start ${startWords(s)}`],
          },
          ticks: {
            stepSize: tickStep(end, 20, unit),
            maxRotation: 0,
            callback: (v) => (Number(v) > end * 0.995 ? null : String(Number(Number(v).toPrecision(6)))),
          },
        },
        y: { ticks: { autoSkip: false, font: { size: 12 } }, grid: { display: false } },
      },
      plugins: {
        ...captions(`${short(s.title, 60)}: what comes good when`, [
          'Each bar ends, and the plant may be believed, where the quantity stays within 1 % of its change for good.',
          ...(marks.length > 0
            ? [
                `Red mark: limit kept for good (${marks.map((l) => `${l.path} ${l.limit.side === 'below' ? '<' : '>'} ${withUnit(l.limit.value, l.unit)}`).join('; ')}).`,
              ]
            : []),
        ]),
        legend: {
          position: 'top',
          align: 'start',
          labels: { boxWidth: 26, boxHeight: 12, padding: 14 },
        },
        annotation: { annotations },
      } as NonNullable<ChartConfiguration['options']>['plugins'],
    },
  };
}
