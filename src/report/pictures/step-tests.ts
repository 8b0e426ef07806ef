import type { ChartConfiguration } from 'chart.js';
import type { Tested } from '../../study/tune/step-test.ts';
import type { Tuned } from '../../study/tune/tune.ts';
import { figure } from '../figures.ts';
import { gainText, minutes, outputText } from '../loop-words.ts';
import { type Panel, panelSheet } from './panels.ts';
import type { Picture } from './picture.ts';
import { short } from './style.ts';

/** Step tests in manual with the fitted first order plus dead time over them. */
export const stepTests: Picture<Tuned> = {
  name: () => 'step-tests.png',
  parts: (r) => (testsOf(r).length > 0 ? [{ train: '', solute: '' }] : []),
  config,
};

const testsOf = (r: Tuned): Tested[] =>
  [...r.tests, ...(r.real ? [r.real] : [])].filter((t) => t.fit !== null);

function config(r: Tuned): ChartConfiguration {
  const { loop } = r.joined.loops[r.loop];
  const tests = testsOf(r);
  const panels = tests.map((t): Panel => {
    const base = r.atRest.measurement;
    return {
      title: t.name === 'real' ? 'real plant' : `step ${t.name}`,
      unit: 'g/L',
      weight: 1,
      lines: [
        {
          label: `${t.name === 'real' ? 'real plant' : 'plant'}, step ${t.test.step > 0 ? '+' : ''}${outputText(loop, t.test.step)}`,
          data: t.test.times.map((x, k) => ({ x, y: base + t.test.values[k] })),
        },
        { label: 'fit', data: t.fitted.map((y, k) => ({ x: t.test.times[k], y: base + y })) },
      ],
      limits: [],
      from: 0,
    };
  });
  return panelSheet({
    title: `${loop.name}: step tests of ${short(loop.measure.of, 40)} and their fits`,
    answer: tests.map((t) =>
      short(
        `${t.name}: ${gainText(loop, 1 / (t.fit?.gain ?? 1), true)}, lag ${minutes(t.fit?.lag ?? 0)}, delay ${minutes(t.fit?.delay ?? 0)}; off ${figure(100 * (t.fit?.error ?? 0), 2)} % of the largest deviation`,
        140,
      ),
    ),
    source: `${short(r.joined.plant.scenario.title, 60)}: output stepped in manual on the full plant, without the analyser`,
    span: Math.max(...tests.map((t) => t.test.times[t.test.times.length - 1])),
    panels,
    shades: [],
  });
}
