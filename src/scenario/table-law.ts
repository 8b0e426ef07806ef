import { concentration, contentKinds } from './content.ts';
import { BadData, columnIndex, headerUnit, numbers, readTable, type Table } from './csv.ts';
import type { LawContext, RawLaw } from './laws.ts';
import type { Problem } from './refusal.ts';
import type { Law, Path, Phase } from './scenario.ts';
import { quantity } from './units.ts';

type RawTable = RawLaw & { law: 'table' };

/** Measured points: two lists with a unit, or two columns of a CSV file. Complains in place. */
export function readTableLaw(
  raw: RawTable,
  solute: string,
  c: LawContext,
  path: Path,
  problems: Problem[],
): Law | null {
  const complain = (message: string, ...at: string[]): null => {
    problems.push({ path: [...path, ...at], message });
    return null;
  };
  const columns = raw.file === undefined ? listed(raw, complain) : filed(raw, raw.file, c.folder, complain);
  if (columns === null) return null;
  const before = problems.length;
  const inside = (phase: Phase): number[] => {
    const { kind, factor, values } = columns[phase];
    return values.map((v) =>
      concentration({ kind, value: v * factor }, solute, phase, c.basis, [...path, phase], problems),
    );
  };
  const [aqueous, organic] = [inside('aqueous'), inside('organic')];
  if (problems.length > before) {
    // Each point lacks the same density or molar mass: said once.
    problems.splice(before, problems.length, ...firstOfEach(problems.slice(before)));
    return null;
  }
  const law = throughZero(aqueous, organic, columns.places);
  return typeof law === 'string' ? complain(law) : law;
}

interface Column {
  readonly kind: (typeof contentKinds)[number];
  readonly factor: number;
  readonly values: readonly number[];
}
interface Columns extends Record<Phase, Column> {
  /** Where each point stands, as messages begin with it; empty for points of the scenario itself. */
  readonly places: readonly string[];
}
type Complain = (message: string, ...at: string[]) => null;

function listed(raw: RawTable, complain: Complain): Columns | null {
  const { aqueous, organic, unit } = raw;
  if (typeof aqueous === 'string' || typeof organic === 'string')
    return complain('where columns are named, the CSV file must be named too, such as file: isotherm.csv');
  if (unit === undefined) return complain('the two columns need a unit, such as unit: g/L');
  const q = quantity(`1 ${unit}`, ...contentKinds);
  if ('wrong' in q) return complain(`expected a unit of concentration such as g/L, got '${unit}'`, 'unit');
  if (aqueous.length !== organic.length)
    return complain(
      `the columns differ in length: ${aqueous.length} aqueous, ${organic.length} organic; give one organic for each aqueous`,
      'organic',
    );
  const column = (values: readonly number[]): Column => ({ kind: q.kind, factor: q.value, values });
  return { aqueous: column(aqueous), organic: column(organic), places: [] };
}

function filed(raw: RawTable, file: string, folder: string, complain: Complain): Columns | null {
  const { aqueous, organic } = raw;
  if (typeof aqueous !== 'string' || typeof organic !== 'string')
    return complain('with a file, aqueous and organic name its columns');
  if (raw.unit !== undefined)
    return complain('the columns of a file have their units in their headers; take it out', 'unit');
  const attempt = <T>(read: () => T, at: string): T | null => {
    try {
      return read();
    } catch (e) {
      if (e instanceof BadData) return complain(e.message, at);
      throw e;
    }
  };
  const table = attempt(() => readTable(folder, file), 'file');
  if (table === null) return null;
  const column = (t: Table, name: string): Column => {
    const at = columnIndex(t, name);
    return { ...headerUnit(t, at, ...contentKinds), values: numbers(t, at) };
  };
  const a = attempt(() => column(table, aqueous), 'aqueous');
  const o = attempt(() => column(table, organic), 'organic');
  return a && o && { aqueous: a, organic: o, places: table.rows.map((r) => `${table.file}:${r.line}: `) };
}

function firstOfEach(problems: readonly Problem[]): Problem[] {
  return problems.filter((p, i) => problems.findIndex((q) => q.message === p.message) === i);
}

/** Points from 0, 0 upwards, strictly rising in both columns; or what is wrong with them. */
function throughZero(
  aqueous: readonly number[],
  organic: readonly number[],
  places: readonly string[],
): Law | string {
  const added = aqueous[0] > 0 && organic[0] > 0;
  const a = added ? [0, ...aqueous] : aqueous;
  const o = added ? [0, ...organic] : organic;
  if (a.length < 2) return 'an isotherm needs at least one point besides 0, 0';
  if (a[0] !== 0 || o[0] !== 0)
    return `${places[0] ?? ''}an isotherm starts at 0, 0 (which is added when left out), got ${a[0]}, ${o[0]} g/L`;
  const fall = a.findIndex((_, i) => i > 0 && !(a[i] > a[i - 1] && o[i] > o[i - 1]));
  if (fall < 0) return { law: 'table', aqueous: a, organic: o };
  const point = fall + (added ? 0 : 1);
  return `${places[point - 1] ?? ''}the isotherm must rise from point to point in both columns; point ${point} (${a[fall]}, ${o[fall]} g/L) does not lie above (${a[fall - 1]}, ${o[fall - 1]} g/L)`;
}
