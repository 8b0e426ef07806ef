import type { ChartConfiguration } from 'chart.js';
import type { RunResult } from '../../study/result.ts';
import { inner } from './axis.ts';
import { moment } from './moment.ts';
import { fileName, type Part, type Picture } from './picture.ts';
import { captions, legend, lineStyle, points, short } from './style.ts';

/** What leaves the stages along a train at chosen moments: aqueous above, organic below. */
export const profiles: Picture<RunResult> = {
  name: (_, part) => fileName('profiles', (part as Part).train, (part as Part).solute),
  parts: (r) =>
    r.plant.scenario.trains
      .filter((t) => t.stages.length > 1)
      .flatMap((t) =>
        r.plant.scenario.solutes.flatMap((solute, i) =>
          t.equilibrium[i] ? [{ train: t.name, solute }] : [],
        ),
      ),
  config: (r, part) => config(r, part as Part),
};

function config(r: RunResult, { train, solute }: Part): ChartConfiguration {
  const { outputs } = r.plant.system;
  const t = r.plant.scenario.trains.find((q) => q.name === train) as (typeof r.plant.scenario.trains)[number];
  const n = t.stages.length;
  const at = new Map(outputs.map((o, i) => [o.path, i]));
  const datasets = (['aqueous', 'organic'] as const).flatMap((phase) =>
    r.snapshots.map((q, k) => ({
      label: moment(q),
      data: t.stages.map((_, j) => ({
        x: j + 1,
        y: q.outputs[at.get(`${train}.${j + 1}.settler.${phase}.${solute}`) as number],
      })),
      yAxisID: phase,
      pointStyle: points[k % points.length],
      pointRadius: n > 40 ? 0 : 5,
      clip: 8,
      ...lineStyle(k),
    })),
  );
  const axis = (phase: string) => ({
    type: 'linear' as const,
    stack: 'phases',
    stackWeight: 1,
    min: 0,
    max:
      1.14 *
      Math.max(1e-9, ...datasets.filter((d) => d.yAxisID === phase).flatMap((d) => d.data.map((p) => p.y))),
    grid: { color: (c: { tick?: { value: number } }) => (c.tick?.value === 0 ? '#888888' : '#e2e2e2') },
    ticks: { maxTicksLimit: 7, callback: inner },
    title: { display: true, text: [`${phase} ${short(solute, 20)}`, '[g/L]'] },
    afterFit: (scale: { width: number }) => {
      scale.width = 84;
    },
  });
  return {
    type: 'line',
    data: { datasets },
    options: {
      parsing: false,
      layout: { padding: { left: 6, right: 22, bottom: 4 } },
      scales: {
        x: {
          type: 'linear',
          min: 1,
          max: n,
          title: {
            display: true,
            text: [
              `stage of ${train} (1 = where the aqueous enters)`,
              `${short(r.plant.scenario.title, 60)}: what leaves the stages`,
            ],
          },
          ticks: { stepSize: Math.max(1, Math.round(n / 20)) },
        },
        organic: axis('organic'),
        aqueous: axis('aqueous'),
      },
      plugins: {
        ...captions(`${short(train, 40)}: ${solute} along the stages`, [
          answer(r, t.aqueous.to, t.organic.to, solute),
        ]),
        // Both phases use the same style for the same moment, so each moment is listed once.
        legend: legend((i) => i < r.snapshots.length),
      },
    },
  };
}

function answer(r: RunResult, raffinate: string, extract: string, solute: string): string {
  const { outputs } = r.plant.system;
  const read = (y: Float64Array, path: string): string =>
    Number(y[outputs.findIndex((o) => o.path === path)].toPrecision(3)).toString();
  return r.snapshots
    .map(
      (q) =>
        `${q.label}: ${raffinate} ${read(q.outputs, `${raffinate}.${solute}`)}, ${extract} ${read(q.outputs, `${extract}.${solute}`)} g/L`,
    )
    .slice(-2)
    .join('   ');
}
