import type { Compare } from './commissioning.ts';
import { type Basis, concentration, contentKinds } from './content.ts';
import { BadData, columnIndex, elapsed, headerUnit, readTable, type Table } from './csv.ts';
import type { Outline } from './outline.ts';
import type { Problem } from './refusal.ts';
import type { RawScenario } from './schema.ts';
import { show } from './show.ts';
import { type Kind, MOST } from './units.ts';

const NUMBER = /^[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?$/;

/** Plant samples by quantity. A blank cell is a sample that was not taken. Complains in place. */
export function readCompare(
  raw: RawScenario['compare'],
  outline: Outline,
  basis: Basis,
  folder: string,
  problems: Problem[],
): Compare | null {
  if (raw === undefined) return null;
  const complain = (message: string, ...at: string[]): void => {
    problems.push({ path: ['compare', ...at], message });
  };
  let table: Table;
  let times: number[];
  try {
    table = readTable(folder, raw.file);
    times = elapsed(table, raw.time === undefined ? 0 : columnIndex(table, raw.time));
  } catch (e) {
    if (!(e instanceof BadData)) throw e;
    complain(e.message, 'file');
    return null;
  }
  const begins = raw.at?.value ?? 0;
  const early = times.findIndex((t) => t + begins < 0);
  if (early >= 0)
    complain(
      `${table.file}:${table.rows[early].line}: lies before the start of the run; leave it out, or state a later at`,
      'file',
    );
  const entries = Object.entries(raw.columns);
  if (entries.length === 0)
    complain("name at least one column, such as {raffinate.copper: 'Cu g/L'}", 'columns');
  const columns = entries.flatMap(([quantity, column]): Compare['columns'][number][] => {
    const target = outline.limitable.get(quantity);
    // An unknown quantity is complained about with the paths.
    if (!target) return [];
    try {
      const at = columnIndex(table, column);
      const { kind, factor } = headerUnit(table, at, ...kindsOf(target.what));
      const inside = (v: number): number =>
        target.component === undefined
          ? v
          : concentration(
              { kind, value: v },
              target.component,
              target.phase,
              basis,
              ['compare', 'columns', quantity],
              problems,
            );
      const own = cells(table, at).flatMap((v, i) =>
        v === null ? [] : [{ t: times[i] + begins, v: inside(v * factor) }],
      );
      if (own.length === 0)
        throw new BadData(`${table.file}: the column ${show(column)} holds no sample; name another`);
      return [{ quantity, times: own.map((q) => q.t), values: own.map((q) => q.v) }];
    } catch (e) {
      if (!(e instanceof BadData)) throw e;
      complain(e.message, 'columns', quantity);
      return [];
    }
  });
  return { file: table.file, columns };
}

function kindsOf(what: string): Kind[] {
  if (what === 'volume') return ['a volume'];
  // A mass fraction needs to know what else the sample held.
  return what === 'flow' ? ['a flow by volume'] : contentKinds.filter((k) => k !== 'a mass fraction');
}

function cells(t: Table, column: number): (number | null)[] {
  return t.rows.map(({ cells: row, line }) => {
    const cell = row[column].trim();
    if (cell === '') return null;
    const value = Number(cell);
    if (NUMBER.test(cell) && Math.abs(value) <= MOST) return value;
    throw new BadData(
      `${t.file}:${line}: expected a number or nothing in column ${show(t.header[column])}, got ${show(cell)}`,
    );
  });
}
