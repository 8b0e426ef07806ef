import type { ChartConfiguration } from 'chart.js';
import { clock, figure, shown, withUnit } from '../figures.ts';
import { limitWords, upsetWords } from '../rehearse-words.ts';
import type { Picture } from './picture.ts';
import type { Rehearsed } from './start-size.ts';
import { captions, colours, LIMIT, short } from './style.ts';

const MOST_ROWS = 14;
const KEPT = colours[0];
const BROKEN = colours[1];

/** The answers by rank, best on top: worst value of the limited quantity as a bar against the limit, the rest in words. */
export const ranked: Picture<Rehearsed> = {
  name: () => 'ranked.png',
  parts: ({ result: r }) => (r.answers.length > 0 ? [{ train: '', solute: '' }] : []),
  config({ result: r }): ChartConfiguration {
    const main = r.nothing.limits[r.chief];
    const { unit, factor } = shown(main.unit);
    const rows = [
      ...r.answers.slice(0, MOST_ROWS).map((a, i) => ({
        name: `${i + 1}  ${a.answer.name}`,
        figures: a.figures,
        words: [
          a.figures.kept ? 'kept' : `over ${clock(a.figures.outside)}, ${figure(a.figures.beyond)} kg above`,
          ...(a.latest === null ? [] : [`latest start ${clock(a.latest - r.ground.first)}`]),
          `${figure(a.figures.extraSolvent)} m³ more organic`,
        ].join(', '),
      })),
      {
        name: 'nothing done',
        figures: r.nothing,
        words: r.nothing.kept
          ? 'kept'
          : `over ${clock(r.nothing.outside)}, ${figure(r.nothing.beyond)} kg above`,
      },
    ];
    const values = rows.map((q) => q.figures.limits[r.chief].worst.value * factor);
    const largest = Math.max(...values, main.limit.value * factor);
    const annotations: Record<string, object> = {
      limit: {
        type: 'line',
        xMin: main.limit.value * factor,
        xMax: main.limit.value * factor,
        borderColor: LIMIT,
        borderWidth: 2,
        borderDash: [3, 3],
        label: {
          display: true,
          content: `limit ${withUnit(main.limit.value, main.unit)}`,
          position: 'end',
          color: LIMIT,
          backgroundColor: 'rgba(255,255,255,0.9)',
          padding: 2,
          font: { size: 12 },
        },
      },
    };
    rows.forEach((q, i) => {
      annotations[`words${i}`] = {
        type: 'label',
        xValue: 0,
        yValue: i,
        position: { x: 'start', y: 'center' },
        xAdjust: 8,
        content: short(`${figure(values[i])} ${unit}: ${q.words}`, 90),
        color: '#111111',
        backgroundColor: 'rgba(255,255,255,0.82)',
        borderRadius: 3,
        padding: 3,
        font: { size: 13 },
      };
    });
    const bar = (label: string, kept: boolean, colour: string) => ({
      label,
      data: rows.map((q, i) => (q.figures.kept === kept ? values[i] : null)),
      backgroundColor: colour,
      borderColor: colour,
      grouped: false,
      barPercentage: 0.7,
      categoryPercentage: 1,
    });
    const good = r.answers.filter((a) => a.figures.kept).length;
    return {
      type: 'bar',
      data: {
        labels: rows.map((q) => short(q.name, 34)),
        datasets: [bar('all limits kept', true, KEPT), bar('a limit is broken', false, BROKEN)],
      },
      options: {
        indexAxis: 'y',
        layout: { padding: { left: 6, right: 22, bottom: 4 } },
        scales: {
          x: {
            type: 'linear',
            min: 0,
            max: 1.12 * largest,
            title: {
              display: true,
              text: [
                `worst ${main.path} [${unit}]`,
                short(`${r.scenario.title}: ${upsetWords(r).join('; ')}`, 130),
              ],
            },
          },
          y: { grid: { display: false } },
        },
        plugins: {
          ...captions(`${short(r.scenario.title, 60)}: answers by rank`, [
            `${good} of ${r.answers.length} answers keep ${limitWords(main.limit, main.unit)}${r.nothing.limits.length > 1 ? ' and all other limits' : ''}; the best is on top.`,
          ]),
          annotation: { annotations },
        } as NonNullable<ChartConfiguration['options']>['plugins'],
      },
    };
  },
};
