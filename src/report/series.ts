import type { WriteStream } from 'node:fs';
import type { Plant } from '../plant/assemble.ts';
import type { RunResult } from '../study/result.ts';
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

/** Rows written at a time: bounded memory whatever the length. */
const CHUNK = 500;

/** Writes the records as CSV in full double precision, in chunks. Waits where the disk is slower. */
export async function writeSeries(result: RunResult, to: WriteStream): Promise<void> {
  const list = seriesColumns(result.plant);
  const { times, rows } = result.records;
  const { derived } = result;
  const headers = ['time [h]', ...list.map((c) => c.header), ...derived.map(derivedHeader)];
  let text = `${headers.map(cell).join(',')}\r\n`;
  for (let k = 0; k < times.length; k++) {
    text += times[k] / 3600;
    const row = rows[k];
    for (const c of list) text += `,${c.factor === 1 ? row[c.output] : row[c.output] * c.factor}`;
    for (const d of derived) text += `,${d.value(row) * shown(d.unit).factor}`;
    text += '\r\n';
    if (k % CHUNK === CHUNK - 1 || k === times.length - 1) {
      if (!to.write(text)) await new Promise<void>((resolve) => to.once('drain', () => resolve()));
      text = '';
    }
  }
}
