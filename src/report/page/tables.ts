/** A table of the page: figures as they stand in `summary.json`. */
export interface PageTable {
  readonly name: string;
  readonly head: readonly string[];
  readonly rows: readonly (readonly Cell[])[];
}

export type Cell = string | number | boolean | null;

/** Rows of one table on the page; all of them stand in `summary.json`. */
const MOST_ROWS = 200;
/** Lists that are charts, or nobody's reading. */
const LEFT_OUT = new Set(['results', 'responses', 'values', 'points', 'versions', 'places', 'map']);

/** Units at the end of a key, as they are written. */
const UNITS: readonly (readonly [suffix: string, unit: string])[] = [
  ['_kg_s_per_m3', 'kg s/m³'],
  ['_per_kg_per_m3', 'per g/L'],
  ['_kg_per_m3', 'g/L'],
  ['_m3_per_s', 'm³/s'],
  ['_m3', 'm³'],
  ['_kg', 'kg'],
  ['_deg', '°'],
  ['_s', 's'],
];

/** A key of the summary in words: `beyond_kg` → `beyond [kg]`. */
export function words(key: string): string {
  const unit = UNITS.find(([suffix]) => key.endsWith(suffix));
  const bare = unit ? key.slice(0, -unit[0].length) : key;
  return `${bare.replaceAll('_', ' ')}${unit ? ` [${unit[1]}]` : ''}`;
}

const isCell = (v: unknown): v is Cell =>
  v === null || typeof v === 'string' || typeof v === 'number' || typeof v === 'boolean';
const isRecord = (v: unknown): v is Readonly<Record<string, unknown>> =>
  typeof v === 'object' && v !== null && !Array.isArray(v);

/** What stands elsewhere on the page, or is nobody's reading. */
const NO_KEYS = new Set([
  'schema',
  'cautions',
  'title',
  'about',
  'verb',
  'seconds',
  'scenario_file',
  'upsettle_version',
]);

/** Parts whose own figures are the answer. */
const ANSWERS = new Set(['tuned', 'standard', 'nothing']);

export interface KeyFigure {
  readonly name: string;
  readonly key: string;
  readonly value: Cell;
}

/** Single figures of a summary, those of the parts that hold the answer included. */
export function keyFigures(summary: object): KeyFigure[] {
  return Object.entries(summary).flatMap(([key, value]): KeyFigure[] => {
    if (ANSWERS.has(key) && isRecord(value)) return keyFigures(value);
    if (NO_KEYS.has(key) || !isCell(value) || value === null || value === '') return [];
    return [{ name: words(key), key, value }];
  });
}

/** Every list of a summary whose members have figures of their own, and every part of it that holds figures alone. */
export function tablesOf(summary: object, path = ''): PageTable[] {
  return Object.entries(summary).flatMap(([key, v]): PageTable[] => {
    if (LEFT_OUT.has(key)) return [];
    const name = path === '' ? words(key) : `${path}: ${words(key)}`;
    if (isRecord(v)) {
      const own = Object.entries(v).flatMap(([k, q]) => (isCell(q) ? [[words(k), q]] : []));
      const table: PageTable[] = own.length > 1 ? [{ name, head: ['figure', 'value'], rows: own }] : [];
      return [...table, ...tablesOf(v, name)];
    }
    if (!Array.isArray(v) || v.length === 0 || !v.every(isRecord)) return [];
    const keys = [...new Set(v.flatMap((row) => Object.keys(row).filter((k) => isCell(row[k]))))];
    if (keys.length < 2) return [];
    const rows = v
      .slice(0, MOST_ROWS)
      .map((row) => keys.map((k) => (isCell(row[k]) ? row[k] : null) ?? null));
    return [{ name, head: keys.map(words), rows }];
  });
}
