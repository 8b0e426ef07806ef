import type { ChartOptions } from 'chart.js';

/** Okabe and Ito's palette (2008), told apart by people with any kind of colour vision; with differing dashes. */
export const colours = ['#0072B2', '#D55E00', '#009E73', '#CC79A7', '#E69F00', '#56B4E9', '#000000'];
export const dashes: number[][] = [[], [9, 4], [3, 3], [11, 3, 3, 3], [6, 2], [1, 3], [14, 5]];
export const points = ['circle', 'rect', 'triangle', 'rectRot', 'crossRot', 'star', 'line'] as const;

export const LIMIT = '#B00020';
export const SHADE = 'rgba(230, 159, 0, 0.16)';

export const lineStyle = (
  i: number,
): { borderColor: string; backgroundColor: string; borderDash: number[]; borderWidth: number } => ({
  borderColor: colours[i % colours.length],
  backgroundColor: colours[i % colours.length],
  // Another round of colours comes with other dashes.
  borderDash: dashes[(i + Math.floor(i / colours.length)) % dashes.length],
  borderWidth: 2,
});

/** Heading, and the answer in a line or two. Where a picture comes from stands below its lowest axis. */
export function captions(title: string, answer: readonly string[]): NonNullable<ChartOptions['plugins']> {
  return {
    title: {
      display: true,
      text: title,
      align: 'start',
      font: { size: 19, weight: 'bold' },
      padding: { top: 6, bottom: 4 },
    },
    subtitle: {
      display: answer.length > 0,
      text: [...answer],
      align: 'start',
      font: { size: 14 },
      padding: { top: 0, bottom: 8 },
    },
    legend: legend(() => true),
  };
}

/**
 * Legend with the dash and the colour of each line, or the marker where there is no line; the chart library's own
 * would draw every line solid.
 */
export function legend(
  listed: (dataset: number) => boolean,
): NonNullable<NonNullable<ChartOptions['plugins']>['legend']> {
  return {
    position: 'top',
    align: 'start',
    labels: {
      usePointStyle: true,
      pointStyleWidth: 40,
      padding: 14,
      generateLabels: (chart) =>
        chart.data.datasets.flatMap((d, i) => {
          if (!listed(i)) return [];
          const o = d as {
            borderColor?: string;
            borderDash?: number[];
            showLine?: boolean;
            pointStyle?: string;
          };
          const marker = o.showLine === false;
          return [
            {
              text: d.label ?? '',
              datasetIndex: i,
              strokeStyle: o.borderColor ?? '#000000',
              fillStyle: o.borderColor ?? '#000000',
              lineDash: marker ? [] : (o.borderDash ?? []),
              lineWidth: 2.5,
              pointStyle: marker ? false : 'line',
              fontColor: marker ? o.borderColor : '#222222',
            },
          ];
        }),
    },
  };
}

/** Fits a long text to a number of characters. */
export const short = (text: string, most: number): string =>
  text.length <= most ? text : `${text.slice(0, most - 1)}…`;

/** A long text on lines of a number of characters at most, broken between words. */
export function wrapped(text: string, most: number): string[] {
  const lines: string[] = [];
  for (const word of text.split(' ')) {
    const last = lines[lines.length - 1];
    if (last !== undefined && last.length + 1 + word.length <= most)
      lines[lines.length - 1] = `${last} ${word}`;
    else lines.push(word);
  }
  return lines;
}

/** Leaves lines without a name out of a legend: they continue others in a further field. */
export function named<T extends NonNullable<ChartOptions['plugins']>>(plugins: T): T {
  const labels = plugins.legend?.labels;
  const all = labels?.generateLabels;
  if (labels && all) labels.generateLabels = (chart) => all(chart).filter((q) => q.text !== '');
  return plugins;
}
