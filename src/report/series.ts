import type { Plant } from '../plant/assemble.ts';
import type { F } from '../solve/system.ts';
import type { Derived } from '../study/derived.ts';
import { shown } from './figures.ts';

export interface Column {
  readonly header: string;
  readonly output: number;
  readonly factor: number;
}

const derivedHeader = (d: { path: string; unit: string }): string =>
  `${d.path} [${shown(d.unit).unit || '-'}]`;

/**
 * Columns of `series.csv` after the time: outlets, tanks, other streams and feeds, then vessels along the trains.
 * Header `<path> [unit]`.
 */
export function seriesColumns(plant: Plant): Column[] {
  const { outputs } = plant.system;
  const { scenario: s, network } = plant;
  const own = (name: string): number[] =>
    outputs.flatMap((o, i) => (o.path.startsWith(`${name}.`) ? [i] : []));
  const feeds = s.feeds.map((f) => f.name);
  const outlets = network.outlets.map((o) => o.name);
  const passing = [...network.streams.keys()].filter((n) => !outlets.includes(n) && !feeds.includes(n));
  const order = [
    ...outlets,
    ...s.tanks.map((t) => t.name),
    ...passing,
    ...feeds,
    ...s.trains.map((t) => t.name),
    ...(s.loops ?? []).map((l) => l.name),
  ];
  return [...new Set(order.flatMap(own))].map((output) => {
    const { path, unit } = outputs[output];
    const { unit: text, factor } = shown(unit);
    return { header: `${path} [${text || '-'}]`, output, factor };
  });
}

/** RFC 4180: a cell with a comma, a quote or a line break is quoted. */
const cell = (text: string): string => (/[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text);

/** Lines of `series.csv`, each with its line break, in full double precision. */
export interface SeriesLines {
  readonly header: string;
  /** One record: its time [s] and all outputs, in the System's order and units. */
  line(time: number, row: F): string;
}

/** How the records of a plant are written as CSV. */
export function seriesLines(plant: Plant, derived: readonly Derived[]): SeriesLines {
  const columns = seriesColumns(plant);
  const headers = ['time [h]', ...columns.map((c) => c.header), ...derived.map(derivedHeader)];
  const factors = derived.map((d) => shown(d.unit).factor);
  return {
    header: `${headers.map(cell).join(',')}\r\n`,
    line(time, row) {
      let text = `${time / 3600}`;
      for (const c of columns) text += `,${c.factor === 1 ? row[c.output] : row[c.output] * c.factor}`;
      derived.forEach((d, i) => {
        text += `,${d.value(row) * factors[i]}`;
      });
      return `${text}\r\n`;
    },
  };
}
