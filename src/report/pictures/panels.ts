import type { ChartConfiguration, ScaleOptionsByType } from 'chart.js';
import type { Shade } from '../../study/upsets.ts';
import { captions, LIMIT, lineStyle, SHADE, short } from './style.ts';
import { tickStep, timeUnit } from './time-axis.ts';

export interface PanelLine {
  readonly label: string;
  /** s and shown unit. */
  readonly data: readonly { readonly x: number; readonly y: number }[];
  /** Drawn as marks in the colour of the line before it. */
  readonly marks?: true;
  /** Number of its colour and dash; the next one by default. */
  readonly style?: number;
}

/** One of several diagrams over each other with a common time axis. */
export interface Panel {
  readonly title: string;
  readonly unit: string;
  readonly weight: number;
  readonly lines: readonly PanelLine[];
  /** Values in the shown unit, and s from which on they count. */
  readonly limits: readonly { readonly value: number; readonly label: string; readonly from: number }[];
  /** s from which on the axis holds all of the lines. */
  readonly from: number;
  /** What it shows where the axis has no room for it, inside at its upper right. */
  readonly heading?: string;
}

export interface Sheet {
  readonly title: string;
  readonly answer: readonly string[];
  readonly source: string;
  readonly span: number;
  /** s at which the axis begins, 0 by default, and what it says. */
  readonly begin?: number;
  readonly axis?: string;
  readonly panels: readonly Panel[];
  readonly shades: readonly Shade[];
}

const sheets = new WeakMap<ChartConfiguration, Sheet>();

/** The sheet that a picture was made of; undefined where it is of another kind. */
export const sheetOf = (config: ChartConfiguration): Sheet | undefined => sheets.get(config);

/** Time diagrams over each other: lines, limits across their panel, upsets shaded and numbered through all. */
export function panelSheet(sheet: Sheet): ChartConfiguration {
  const config = chart(sheet);
  sheets.set(config, sheet);
  return config;
}

function chart(sheet: Sheet): ChartConfiguration {
  const unit = timeUnit(sheet.span);
  const end = sheet.span / unit.seconds;
  let style = 0;
  // The chart library stacks axes from the bottom up.
  const order = [...sheet.panels].reverse();
  const axis = (i: number): string => `y${i}`;
  const datasets = sheet.panels.flatMap((panel, i) =>
    panel.lines.map((line) => ({
      label: line.label,
      data: line.data.map((p) => ({ x: p.x / unit.seconds, y: p.y })),
      yAxisID: axis(order.length - 1 - i),
      ...(line.marks
        ? { showLine: false, pointRadius: 4, pointStyle: 'circle' as const, ...lineStyle(style - 1) }
        : { pointRadius: 0, pointStyle: 'line' as const, ...lineStyle(line.style ?? style++) }),
    })),
  );
  const annotations: Record<string, object> = {};
  sheet.shades.forEach((s, i) => {
    const from = s.from / unit.seconds;
    const to = Math.max(s.to / unit.seconds, from + end / 600);
    order.forEach((_, k) => {
      annotations[`shade${i}-${k}`] = {
        type: 'box',
        yScaleID: axis(k),
        xMin: from,
        xMax: to,
        backgroundColor: SHADE,
        borderWidth: 0,
        drawTime: 'beforeDatasetsDraw',
      };
    });
    annotations[`number${i}`] = {
      type: 'label',
      xValue: (from + to) / 2,
      yValue: (c: { chart: { scales: Record<string, { max: number }> } }) =>
        c.chart.scales[axis(order.length - 1)].max,
      yScaleID: axis(order.length - 1),
      yAdjust: 11,
      content: String(i + 1),
      backgroundColor: 'rgba(255,255,255,0.85)',
      borderRadius: 8,
      padding: { left: 5, right: 5, top: 1, bottom: 1 },
      font: { size: 12, weight: 'bold' },
    };
  });
  order.forEach((panel, i) => {
    if (panel.heading !== undefined)
      annotations[`heading${i}`] = {
        type: 'label',
        xValue: end,
        yValue: (c: { chart: { scales: Record<string, { max: number }> } }) => c.chart.scales[axis(i)].max,
        yScaleID: axis(i),
        position: { x: 'end', y: 'start' },
        yAdjust: 3,
        xAdjust: -4,
        content: panel.heading,
        backgroundColor: 'rgba(255,255,255,0.85)',
        padding: 2,
        font: { size: 12 },
      };
    panel.limits.forEach((l, k) => {
      annotations[`limit${i}-${k}`] = {
        type: 'line',
        yScaleID: axis(i),
        xMin: Math.max(sheet.begin ?? 0, l.from) / unit.seconds,
        xMax: end,
        yMin: l.value,
        yMax: l.value,
        borderColor: LIMIT,
        borderWidth: 1.5,
        borderDash: [2, 3],
        label: {
          display: true,
          content: l.label,
          position: isCrowded(panel, l.value, sheet.span) ? 'end' : 'start',
          yAdjust: -10,
          color: LIMIT,
          backgroundColor: 'rgba(255,255,255,0.8)',
          padding: 2,
          font: { size: 12 },
        },
      };
    });
  });
  const scales: Record<string, unknown> = {
    x: {
      type: 'linear',
      min: (sheet.begin ?? 0) / unit.seconds,
      max: end,
      title: {
        display: true,
        text: [`${sheet.axis ?? 'time'} [${unit.name}]`, sheet.source],
        font: { size: 13 },
      },
      ticks: { stepSize: tickStep(end, 20, unit), maxRotation: 0, includeBounds: false },
    },
  };
  order.forEach((panel, i) => {
    scales[axis(i)] = {
      type: 'linear',
      position: 'left',
      stack: 'panels',
      stackWeight: panel.weight,
      offset: false,
      ...range(panel),
      title: {
        display: true,
        text: [short(panel.title, 6 + 8 * panel.weight), `[${panel.unit.replace('^3', '³') || '-'}]`],
        font: { size: 12 },
      },
      border: { color: '#888888' },
      grid: {
        color: (c: { tick?: { value: number } }) =>
          c.tick?.value === range(panel).min ? '#888888' : '#e2e2e2',
      },
      ticks: {
        maxTicksLimit: 3 + 2 * panel.weight,
        includeBounds: false,
        callback: tick,
        font: { size: 12 },
      },
      afterFit: (scale: { width: number }) => {
        scale.width = 84;
      },
    };
  });
  return {
    type: 'line',
    data: { datasets },
    options: {
      parsing: false,
      normalized: true,
      layout: { padding: { left: 6, right: 22, bottom: 4 } },
      scales: scales as Record<string, ScaleOptionsByType<'linear'>>,
      plugins: {
        ...captions(sheet.title, sheet.answer),
        decimation: { enabled: true, algorithm: 'min-max' },
        annotation: { annotations },
      } as NonNullable<ChartConfiguration['options']>['plugins'],
    },
  };
}

/** Whether a curve runs where the label of a limit would stand at its start. */
function isCrowded(panel: Panel, limit: number, span: number): boolean {
  const { min, max } = range(panel);
  return panel.lines.some((l) =>
    l.data.some((p) => {
      const above = (p.y - limit) / (max - min);
      return p.x < 0.12 * span && above > -0.02 && above < 0.14;
    }),
  );
}

/**
 * Purities and ratios can be anything in a start-up, while their limits are about the last per cent: the axis is cut to
 * where these can be read.
 */
function aroundLimits({ unit, limits }: Panel, low: number, high: number): [number, number] {
  if (limits.length === 0) return [low, high];
  const values = limits.map((l) => l.value);
  if (unit === '%') {
    const room = 100 - Math.min(...values);
    return [Math.max(low, 100 - MOST_OF_LIMIT * Math.max(room, 1)), high];
  }
  return unit === '-' || unit === ''
    ? [low, Math.min(high, MOST_OF_LIMIT * Math.max(...values))]
    : [low, high];
}

/** How far beyond a limit the axis of a purity or a ratio goes. */
const MOST_OF_LIMIT = 5;

/** From zero unless everything happens far above it; room above for labels, limits inside. */
function range(panel: Panel): { min: number; max: number } {
  const counts = (p: { x: number }): boolean => p.x >= panel.from;
  const values = [
    ...panel.lines.flatMap((l) => l.data.filter(counts).map((p) => p.y)),
    ...panel.limits.map((l) => l.value),
  ];
  let high = -Infinity;
  let low = Infinity;
  for (const v of values) {
    if (v > high) high = v;
    if (v < low) low = v;
  }
  if (!Number.isFinite(high)) return { min: 0, max: 1 };
  [low, high] = aroundLimits(panel, low, high);
  const span = high - low;
  const min = low > 0.6 * high && span > 0 ? low - 0.15 * span : Math.min(0, low);
  const room = panel.heading === undefined ? 0.16 : 0.16 + 0.24 / panel.weight;
  const max = high + room * (high - min || Math.abs(high) || 1);
  return { min, max };
}

/** Pixels between the middle of a label and its edge. */
const HALF_A_LINE = 8;

/** No label at the very ends of an axis: those of two panels would meet. */
function tick(this: { min: number; max: number; height?: number }, value: number | string): string | null {
  const v = Number(value);
  const near = (this.max - this.min) * Math.max(0.03, HALF_A_LINE / (this.height || Infinity));
  if (v > this.max - near || (v < this.min + near && this.min !== 0)) return null;
  return Math.abs(v) >= 1e6 ? v.toExponential(0) : String(Number(v.toPrecision(6)));
}
